import type { ReadRange } from '../../shared/contracts/reader';
import type { Tally, TallySpec } from '../../shared/contracts/tally';
import { accumulatorFromPart, type Part } from '../accumulators/accumulator';
import type { CompiledKernels } from '../accumulators/compiled-kernels';
import { isKeepable, PairCache } from '../accumulators/pair-cache';
import { TagAccumulator } from '../accumulators/tag-accumulator';
import { SEARCH_RECORDS } from './chunks';
import type { AskOffset } from './compute';
import { type CountRequest, memoKey, sizeOf } from './count-request';
import { InputCounting } from './input-counting';
import type { Job } from './job';
import { searchKeepingSpec } from './pair-keeping';
import type { PairMemo } from './pair-memo';
import { createStage, type StageProgress } from './progress';
import { bytesOfInput, keyOfInput } from './read-input';
import type { TallyMemo } from './tally-memo';

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
  const countings: InputCounting[] = [];
  for (const request of requests) {
    const kept = memo.find(memoKey(request));
    if (kept === null)
      countings.push(new InputCounting(request, undefined, pairBytesFor(request, memo), kernels));
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
  kernels: CompiledKernels,
): Promise<Map<string, Part>> {
  const countings = shares.map(({ request, chunks }) => new InputCounting(request, chunks, 0, kernels));
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

/** Without a key the files cannot be known again, and keeping their pairs would be for nothing. */
function pairBytesFor({ input }: CountRequest, memo: TallyMemo): number {
  return keyOfInput(input) === null ? 0 : memo.pairs.limitBytes;
}

/** Lets go the pairs of the inputs that need most until what all of them are going to need fits. */
function keepWithin(memo: PairMemo, countings: readonly InputCounting[]): void {
  const { limitBytes } = memo;
  const needs = (): number => countings.reduce((sum, { expectedPairBytes }) => sum + expectedPairBytes, 0);
  while (needs() > limitBytes) {
    const most = countings.reduce((a, b) => (b.expectedPairBytes > a.expectedPairBytes ? b : a));
    most.dropPairs(limitBytes);
  }
  memo.makeRoom(countings.reduce((sum, { pairBytes }) => sum + pairBytes, 0));
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
