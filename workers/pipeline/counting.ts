import type { RunInput } from '../../shared/contracts/engine';
import type { ReadRange } from '../../shared/contracts/reader';
import type { TagSpec, TagTally, Tally, TallySpec } from '../../shared/contracts/tally';
import {
  type Accumulator,
  accumulatorFromPart,
  createAccumulator,
  type Part,
} from '../accumulators/accumulator';
import { type CompiledKernels, NO_COMPILED_KERNELS } from '../accumulators/compiled-kernels';
import { isKeepable, PairCache } from '../accumulators/pair-cache';
import { TagAccumulator } from '../accumulators/tag-accumulator';
import type { StudyInput } from '../studies/study';
import { planChunks, SEARCH_RECORDS } from './chunks';
import type { AskOffset } from './compute';
import type { Job } from './job';
import { OffsetChain } from './offsets';
import { keepingSpec, searchKeepingSpec, tooManyPairs } from './pair-keeping';
import type { PairMemo } from './pair-memo';
import { createStage, type StageProgress } from './progress';
import { bytesOfInput, keyOfInput } from './read-input';
import type { MemoKey, TallyMemo } from './tally-memo';

export interface CountRequest {
  name: string;
  input: RunInput;
  studyInput: StudyInput;
  spec: TallySpec;
}

/** Counts one acquisition in file order, whatever the order in which its chunks come back. */
class Counting {
  readonly request: CountRequest;
  readonly chunks: ReadRange[];
  readonly #accumulator: Accumulator;
  readonly #waiting = new Map<number, Part>();
  readonly offsets = new OffsetChain();
  #merged = 0;
  /** What is counted as long as pairs are kept; null when they are not. */
  #keeping: TagSpec | null = null;
  /** Why they are not. */
  #refusal: string | null = null;
  /** Pairs of the records in which the delay is looked for. */
  #first: PairCache | null = null;

  constructor(
    request: CountRequest,
    chunks = planChunks(request.studyInput.facts),
    pairBytes = 0,
    kernels: CompiledKernels = NO_COMPILED_KERNELS,
  ) {
    this.request = request;
    this.chunks = chunks;
    if (request.spec.kind === 'tags' && pairBytes > 0) {
      const keeping = keepingSpec(request.spec, pairBytes);
      if ('why' in keeping) this.#refusal = keeping.why;
      else this.#keeping = keeping;
    }
    // Tags of chunks only add up here; frames have a difference across every seam.
    this.#accumulator = createAccumulator(this.spec, { ...kernels, tags: null });
  }

  /** What the next chunk is to be counted with: what was asked, and pairs kept beside it where they fit. */
  get spec(): TallySpec {
    return this.#keeping ?? this.request.spec;
  }

  /** Bytes of the pairs so far; 0 when none are kept, infinite when a chunk alone had too many. */
  get pairBytes(): number {
    if (this.#keeping === null || !(this.#accumulator instanceof TagAccumulator)) return 0;
    return this.#accumulator.keptBytes() ?? Number.POSITIVE_INFINITY;
  }

  /** What the pairs of all chunks are going to take, by those so far. */
  get expectedPairBytes(): number {
    return (this.pairBytes * sizeOf(this.chunks)) / Math.max(1, sizeOf(this.chunks.slice(0, this.#merged)));
  }

  /** Goes on in the reduced form: the windows that were asked for alone. */
  dropPairs(limitBytes: number): void {
    if (this.#keeping === null || !(this.#accumulator instanceof TagAccumulator)) return;
    this.#refusal = tooManyPairs(this.#keeping, this.expectedPairBytes, limitBytes);
    this.#keeping = null;
    this.#first = null;
    this.#accumulator.dropKept();
  }

  /** Hands the pairs over to the memo, or the reason why there are none. */
  keepPairs(memo: TallyMemo, tally: Tally): void {
    const key = memoKey(this.request);
    if (this.#first !== null) {
      memo.pairs.keep({ ...key, range: { start: 0, end: SEARCH_RECORDS } }, this.#first);
    }
    const cache = this.#cacheOf(tally);
    if (cache !== null) memo.pairs.keep(key, cache);
    else if (tally.kind === 'tags' && !isKeepable(tally)) memo.pairs.refuse(key, disordered(tally));
    else if (this.#refusal !== null) memo.pairs.refuse(key, this.#refusal);
  }

  #cacheOf(tally: Tally): PairCache | null {
    const spec = this.#keeping;
    if (!spec?.keepPairs || tally.kind !== 'tags' || !(this.#accumulator instanceof TagAccumulator))
      return null;
    const kept = this.#accumulator.kept();
    return kept && isKeepable(tally) ? new PairCache(spec, spec.keepPairs, tally, kept) : null;
  }

  /** Slices of the parts so far: those of later parts need not be shorter. */
  get leastBits(): number {
    return this.#accumulator instanceof TagAccumulator ? this.#accumulator.sliceBits : 0;
  }

  /** One worker reads in order and knows the rollovers before a chunk; several tell each other. */
  offsetsAt(index: number, job: Job): AskOffset | undefined {
    return job.workers > 1 ? (advanceTick) => this.offsets.ask(index, advanceTick) : undefined;
  }

  get begun(): boolean {
    return this.#merged > 0;
  }

  take(index: number, part: Part): boolean {
    this.#waiting.set(index, part);
    const before = this.#merged;
    for (let next = this.#waiting.get(this.#merged); next; next = this.#waiting.get(this.#merged)) {
      this.#waiting.delete(this.#merged);
      this.#accumulator.merge(accumulatorFromPart(this.spec, next));
      if (this.chunks[this.#merged]?.end === SEARCH_RECORDS) this.#first = this.#cacheOf(this.tally());
      this.#merged += 1;
    }
    return this.#merged > before;
  }

  tally(): Tally {
    return this.#accumulator.tally();
  }

  part(): Part {
    return this.#accumulator.toPart();
  }
}

/**
 * Counts all inputs of a run together, early chunks of each first, so that every map is seen soon. `onGrowth` gets the
 * tallies so far whenever they grew and `isWanted` says that a look is wanted.
 */
export async function countInputs(
  job: Job,
  requests: readonly CountRequest[],
  memo: TallyMemo,
  look: { isWanted(): boolean; show(tallies: Map<string, Tally>, fraction: number): void },
  kernels: CompiledKernels,
): Promise<Map<string, Tally>> {
  const done = new Map<string, Tally>();
  const countings: Counting[] = [];
  for (const request of requests) {
    const kept = memo.find(memoKey(request));
    if (kept === null) countings.push(new Counting(request, undefined, pairBytesFor(request, memo), kernels));
    else done.set(request.name, kept);
  }
  if (countings.length === 0) return done;
  const bytes = countings.reduce((sum, counting) => sum + bytesOfInput(counting.request.input), 0);
  const names = countings.map((counting) => counting.request.name).join(', ');
  const isFrames = countings.every((counting) => counting.request.studyInput.facts.kind === 'frames');
  const stage = createStage(job.id, `${names}: reading`, bytes, job.emit, isFrames ? 'frames' : 'records');
  const tasks = countings.flatMap((counting) =>
    counting.chunks.map((range, index) => ({ counting, range, index, at: index / counting.chunks.length })),
  );
  tasks.sort((a, b) => a.at - b.at);
  const counted = Promise.all(
    tasks.map(async ({ counting, range, index }) => {
      const part = await countChunk(job, counting, range, stage, counting.offsetsAt(index, job));
      if (!counting.take(index, part)) return;
      keepWithin(memo.pairs, countings);
      if (stage.fraction >= 1 || !look.isWanted()) return;
      job.checkCancelled();
      const soFar = new Map(done);
      for (const other of countings) if (other.begun) soFar.set(other.request.name, other.tally());
      look.show(soFar, stage.fraction);
    }),
  );
  await counted.finally(() => {
    for (const counting of countings) counting.offsets.stop();
  });
  stage.finish();
  for (const counting of countings) {
    const tally = counting.tally();
    memo.keep(memoKey(counting.request), tally);
    counting.keepPairs(memo, tally);
    done.set(counting.request.name, tally);
  }
  return done;
}

/** Counts some chunks in a row of every input: the share of one machine. */
export async function countShard(
  job: Job,
  shares: readonly { request: CountRequest; chunks: ReadRange[] }[],
): Promise<Map<string, Part>> {
  const countings = shares.map(({ request, chunks }) => new Counting(request, chunks));
  const bytes = countings.reduce((sum, { request, chunks }) => sum + bytesOf(request, chunks), 0);
  const stage = createStage(job.id, 'reading', bytes, job.emit);
  await Promise.all(
    countings.flatMap((counting) =>
      counting.chunks.map(async (range, index) => {
        counting.take(index, await countChunk(job, counting, range, stage));
      }),
    ),
  );
  stage.finish();
  return new Map(countings.map((counting) => [counting.request.name, counting.part()]));
}

/** One range counted on its own: the pass that looks for the delay. */
export async function countRange(
  job: Job,
  request: CountRequest,
  range: ReadRange,
  memo: TallyMemo,
): Promise<Tally> {
  const key = { ...memoKey(request), range };
  const kept = memo.find(key);
  if (kept !== null) return kept;
  const bytes = bytesOf(request, [range]);
  const stage = createStage(job.id, `${request.name}: finding the delay`, bytes, job.emit);
  const spec =
    request.spec.kind === 'tags' && sizeOf([range]) <= SEARCH_RECORDS
      ? searchKeepingSpec(request.spec, pairBytesFor(request, memo))
      : request.spec;
  const counted = accumulatorFromPart(spec, await countChunk(job, { request, spec }, range, stage));
  const tally = counted.tally();
  memo.keep(key, tally);
  const pairs = counted instanceof TagAccumulator ? counted.kept() : null;
  if (
    spec.kind === 'tags' &&
    spec.keepPairs &&
    pairs !== null &&
    tally.kind === 'tags' &&
    isKeepable(tally)
  ) {
    memo.pairs.keep(key, new PairCache(spec, spec.keepPairs, tally, pairs));
  }
  return tally;
}

function disordered({ outOfOrder }: TagTally): string {
  return `${outOfOrder} tags came out of order, so that other windows need the file itself.`;
}

/** Without a key the files cannot be known again, and keeping their pairs would be for nothing. */
function pairBytesFor({ input }: CountRequest, memo: TallyMemo): number {
  return keyOfInput(input) === null ? 0 : memo.pairs.limitBytes;
}

/** Lets go the pairs of the inputs that need most until what all of them are going to need fits. */
function keepWithin(memo: PairMemo, countings: readonly Counting[]): void {
  const { limitBytes } = memo;
  const needs = (): number => countings.reduce((sum, { expectedPairBytes }) => sum + expectedPairBytes, 0);
  while (needs() > limitBytes) {
    const most = countings.reduce((a, b) => (b.expectedPairBytes > a.expectedPairBytes ? b : a));
    most.dropPairs(limitBytes);
  }
  memo.makeRoom(countings.reduce((sum, { pairBytes }) => sum + pairBytes, 0));
}

function sizeOf(ranges: readonly ReadRange[]): number {
  return ranges.reduce((sum, { start, end }) => sum + end - start, 0);
}

/** Of the file, as far as its records are of one length. */
function bytesOf({ input, studyInput: { facts } }: CountRequest, ranges: readonly ReadRange[]): number {
  const all = facts.kind === 'tags' ? facts.records : facts.frames;
  return all === 0 ? 0 : Math.round((bytesOfInput(input) * sizeOf(ranges)) / all);
}

/** The specification may ask for more than the request does: for pairs to be kept. */
function countChunk(
  job: Job,
  counting: { request: CountRequest; spec: TallySpec; leastBits?: number },
  range: ReadRange,
  stage: StageProgress,
  askOffset?: AskOffset,
): Promise<Part> {
  const { request } = counting;
  const { source, layout, following, companion } = request.input;
  const input = { source, layout, following, companion };
  return job.run(request.name, (host, taskId) => {
    const { spec, leastBits = 0 } = counting;
    const task = { taskId, input, spec, range, leastBits };
    return host.count(task, ({ bytes, records }) => stage.add(bytes, records), askOffset);
  });
}

export function memoKey(request: CountRequest): MemoKey {
  const { facts } = request.studyInput;
  return {
    ...request.input,
    spec: request.spec,
    range: { start: 0, end: facts.kind === 'tags' ? facts.records : facts.frames },
  };
}
