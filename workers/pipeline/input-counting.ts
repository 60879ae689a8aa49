import type { ReadRange } from '../../shared/contracts/reader';
import type { TagSpec, TagTally, Tally, TallySpec } from '../../shared/contracts/tally';
import { type Accumulator, createAccumulator, mergePart, type Part } from '../accumulators/accumulator';
import { type CompiledKernels, NO_COMPILED_KERNELS } from '../accumulators/compiled-kernels';
import { isKeepable, PairCache } from '../accumulators/pair-cache';
import { TagAccumulator } from '../accumulators/tag-accumulator';
import { planChunks, SEARCH_RECORDS } from './chunks';
import type { AskOffset } from './compute';
import { type CountRequest, memoKey, sizeOf } from './count-request';
import type { Job } from './job';
import { OffsetChain } from './offsets';
import { keepingSpec, tooManyPairs } from './pair-keeping';
import type { TallyMemo } from './tally-memo';

/** Counts one acquisition in file order, whatever the order in which its chunks come back. */
export class InputCounting {
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
    const cache = this.#cacheOf(tally);
    if (cache !== null) memo.pairs.keep(key, cache, this.#first);
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
      mergePart(this.#accumulator, this.spec, next);
      if (this.#keeping !== null && this.chunks[this.#merged]?.end === SEARCH_RECORDS) {
        this.#first = this.#cacheOf(this.tally());
      }
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

function disordered({ outOfOrder }: TagTally): string {
  return `${outOfOrder} tags came out of order, so that other windows need the file itself.`;
}
