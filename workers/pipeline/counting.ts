import type { RunInput } from '../../shared/contracts/engine';
import type { ReadRange } from '../../shared/contracts/reader';
import type { Tally, TallySpec } from '../../shared/contracts/tally';
import {
  type Accumulator,
  accumulatorFromPart,
  createAccumulator,
  type Part,
} from '../accumulators/accumulator';
import type { StudyInput } from '../studies/study';
import { planChunks } from './chunks';
import type { Job } from './job';
import { createStage, type StageProgress } from './progress';
import type { TallyMemo } from './tally-memo';

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
  #merged = 0;

  constructor(request: CountRequest, chunks = planChunks(request.studyInput.facts)) {
    this.request = request;
    this.chunks = chunks;
    this.#accumulator = createAccumulator(request.spec);
  }

  get begun(): boolean {
    return this.#merged > 0;
  }

  take(index: number, part: Part): boolean {
    this.#waiting.set(index, part);
    const before = this.#merged;
    for (let next = this.#waiting.get(this.#merged); next; next = this.#waiting.get(this.#merged)) {
      this.#waiting.delete(this.#merged);
      this.#accumulator.merge(accumulatorFromPart(this.request.spec, next));
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
): Promise<Map<string, Tally>> {
  const done = new Map<string, Tally>();
  const countings: Counting[] = [];
  for (const request of requests) {
    const kept = memo.find(memoKey(request));
    if (kept === null) countings.push(new Counting(request));
    else done.set(request.name, kept);
  }
  if (countings.length === 0) return done;
  const bytes = countings.reduce((sum, counting) => sum + counting.request.input.source.size, 0);
  const names = countings.map((counting) => counting.request.name).join(', ');
  const isFrames = countings.every((counting) => counting.request.studyInput.facts.kind === 'frames');
  const stage = createStage(job.id, `${names}: reading`, bytes, job.emit, isFrames ? 'frames' : 'records');
  const tasks = countings.flatMap((counting) =>
    counting.chunks.map((range, index) => ({ counting, range, index, at: index / counting.chunks.length })),
  );
  tasks.sort((a, b) => a.at - b.at);
  await Promise.all(
    tasks.map(async ({ counting, range, index }) => {
      const part = await countChunk(job, counting.request, range, stage);
      if (!counting.take(index, part) || stage.fraction >= 1 || !look.isWanted()) return;
      job.checkCancelled();
      const soFar = new Map(done);
      for (const other of countings) if (other.begun) soFar.set(other.request.name, other.tally());
      look.show(soFar, stage.fraction);
    }),
  );
  stage.finish();
  for (const counting of countings) {
    const tally = counting.tally();
    memo.keep(memoKey(counting.request), tally);
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
        counting.take(index, await countChunk(job, counting.request, range, stage));
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
  const part = await countChunk(job, request, range, stage);
  const tally = accumulatorFromPart(request.spec, part).tally();
  memo.keep(key, tally);
  return tally;
}

/** Of the file, as far as its records are of one length. */
function bytesOf({ input, studyInput: { facts } }: CountRequest, ranges: readonly ReadRange[]): number {
  const all = facts.kind === 'tags' ? facts.records : facts.frames;
  const wanted = ranges.reduce((sum, { start, end }) => sum + end - start, 0);
  return all === 0 ? 0 : Math.round((input.source.size * wanted) / all);
}

function countChunk(job: Job, request: CountRequest, range: ReadRange, stage: StageProgress): Promise<Part> {
  const { source, layout } = request.input;
  return job.run(request.name, (host, taskId) =>
    host.count({ taskId, source, layout, spec: request.spec, range }, ({ bytes, records }) =>
      stage.add(bytes, records),
    ),
  );
}

function memoKey(request: CountRequest) {
  const { facts } = request.studyInput;
  return {
    source: request.input.source,
    layout: request.input.layout,
    spec: request.spec,
    range: { start: 0, end: facts.kind === 'tags' ? facts.records : facts.frames },
  };
}
