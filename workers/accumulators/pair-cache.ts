import type { PairTally, TagSpec, TagTally } from '../../shared/contracts/tally';
import {
  joinTicks,
  type KeptStretch,
  lagsOfMatrix,
  type PairCells,
  pairCells,
  recountHistogram,
  recountLags,
  recountMaps,
} from '../kernels/pair-recount';
import { copyFrame, frameWithout, type TagFrame } from './pair-cache-frame';
import type { KeptPart } from './pair-cache-keeper';
import { isSameRemoved, type RemovedPixels, removedPixels } from './pair-cache-map';
import {
  type KeptPairs,
  type KeptRange,
  keptBytes,
  slicesOfSlots,
  stretchesIn,
  wholeStretches,
} from './pair-cache-store';
import { type TauChange, type TauWindow, windowChanges } from './pair-cache-windows';
import { MATRIX_LIMIT } from './pair-store';
import { NO_WINDOW } from './tag-part';

/** A histogram of single ticks is held up to this many of them (16 MiB). */
const MOST_TICKS = 2 ** 21;

/** The counts last given, for one mask: the next ones mostly differ from them in few pairs. */
interface LastCounts {
  removed: RemovedPixels;
  tally: TagTally;
  /** Pairs per tick over the whole kept range; null until a histogram is asked for, or for too many ticks. */
  perTick: Float64Array | null;
}

/** All pairs of an acquisition (or of a stretch of it) in a range of tau, and what else its tallies need. */
export class PairCache {
  readonly spec: TagSpec;
  readonly range: KeptRange;
  readonly pairs: number;
  readonly bytes: number;
  readonly #frame: TagFrame;
  readonly #kept: KeptPart;
  #last: LastCounts;

  /** @param tally what was counted with `spec` while the pairs were kept; in order, see `isKeepable`. */
  constructor(spec: TagSpec, range: KeptRange, tally: TagTally, kept: KeptPart) {
    this.spec = spec;
    this.range = range;
    this.pairs = kept.stores.reduce((sum, store) => sum + store.offset.length, 0);
    this.bytes = kept.stores.reduce((sum, store) => sum + keptBytes(store), kept.singles?.byteLength ?? 0);
    const { histogram: _histogram, window: _window, prompt: _prompt, shifted: _shifted, ...frame } = tally;
    this.#frame = frame;
    this.#kept = kept;
    const removed = {
      a: new Uint8Array(frame.a.masked.length),
      b: new Uint8Array(frame.b.masked.length),
      any: false,
    };
    this.#last = { removed, tally, perTick: null };
  }

  /**
   * The tally that counting the bytes with `spec` gives, equal in every field; null when the pairs do not tell: tau
   * beyond what was kept, another detector map (another mask of the same is told), or a mask that makes the slices
   * shorter. O(pairs by which the windows differ from the last ones + ticks of the histogram); a new mask costs a pass
   * over all pairs.
   */
  recount(spec: TagSpec): TagTally | null {
    if (!asksOnlyForPairs(spec) || !isInRange(this.range, spec)) return null;
    const removed = removedPixels(this.spec, spec);
    if (removed === null) return null;
    const frame = removed.any
      ? frameWithout(this.#frame, this.#kept, removed, spec)
      : copyFrame(this.#frame, spec);
    if (frame === null) return null;
    const last = isSameRemoved(removed, this.#last.removed) ? this.#last : null;
    const cells = pairCells({ ...spec.a, removed: removed.a }, { ...spec.b, removed: removed.b });
    const perTick = last?.perTick ?? this.#countTicks(cells);
    const { loTick, hiTick, shiftsTick } = spec.window ?? NO_WINDOW;
    const tally: TagTally = {
      ...frame,
      histogram: this.#countHistogram(spec.histogram, cells, perTick),
      window: { loTick, hiTick, shiftsTick: [...shiftsTick] },
      prompt: this.#countWindows(spec, frame, cells, promptOf, last?.tally ?? null),
      shifted: this.#countWindows(spec, frame, cells, shiftedOf, last?.tally ?? null),
    };
    this.#last = { removed, tally: spec.window === null && last !== null ? last.tally : tally, perTick };
    return tally;
  }

  /** Nothing that `older` tells is lost with it: its map is this one or a mask of it, and its range lies inside. */
  replaces(older: PairCache): boolean {
    return (
      removedPixels(this.spec, older.spec) !== null &&
      this.range.minTauTick <= older.range.minTauTick &&
      this.range.maxTauTick >= older.range.maxTauTick
    );
  }

  #countTicks(cells: PairCells): Float64Array | null {
    const { minTauTick, maxTauTick } = this.range;
    const ticks = maxTauTick - minTauTick + 1;
    if (ticks > MOST_TICKS) return null;
    const perTick = new Float64Array(ticks);
    this.#countPairs({ loTick: minTauTick, binTick: 1, bins: ticks }, cells, perTick);
    return perTick;
  }

  #countHistogram(
    histogram: TagSpec['histogram'],
    cells: PairCells,
    perTick: Float64Array | null,
  ): TagTally['histogram'] {
    const { loTick, binTick, bins } = histogram;
    const counts = new Float64Array(bins);
    if (perTick === null) this.#countPairs(histogram, cells, counts);
    else joinTicks(perTick, loTick - this.range.minTauTick, binTick, counts);
    return { loTick, binTick, counts };
  }

  #countPairs({ loTick, binTick }: TagSpec['histogram'], cells: PairCells, counts: Float64Array): void {
    const { minTauTick } = this.range;
    for (const store of this.#kept.stores) {
      for (const { stretch, bucketTick } of wholeStretches(store)) {
        recountHistogram(stretch, minTauTick + bucketTick - loTick, binTick, cells, counts);
      }
    }
  }

  /** The last counts changed where the windows did, or counted anew where that is less work. */
  #countWindows(
    spec: TagSpec,
    frame: TagFrame,
    cells: PairCells,
    part: WindowPart,
    last: TagTally | null,
  ): PairTally {
    if (spec.window === null) return emptyPairs(spec, frame.slices);
    const anew = this.#stretches(windowChanges([], part.windows(spec.window)));
    const from = last !== null && isFull(last[part.name]) ? last : null;
    const changed =
      from && this.#stretches(windowChanges(part.windows(from.window), part.windows(spec.window)));
    const isLess = from !== null && changed !== null && changed.pairs < anew.pairs;
    const counts = isLess ? copyPairs(from[part.name]) : emptyPairs(spec, frame.slices);
    const { stretches, pairs } = isLess ? changed : anew;
    const { matrix } = counts;
    const slices = new Map(this.#kept.stores.map((store) => [store, frameSlices(store, frame)]));
    const fromMatrix = matrix !== null && pairs > matrix.length;
    for (const { stretch, weight, store } of stretches) {
      recountMaps(stretch, weight, slices.get(store)!, cells, counts);
      if (!fromMatrix) recountLags(stretch, weight, cells, counts);
    }
    if (fromMatrix) lagsOfMatrix(matrix, cells, counts);
    sumPerSlice(counts);
    return counts;
  }

  #stretches(changes: readonly TauChange[]): { stretches: WeightedStretch[]; pairs: number } {
    const { minTauTick } = this.range;
    const stretches = this.#kept.stores.flatMap((store) =>
      changes.flatMap(({ loTick, hiTick, weight }) =>
        stretchesIn(store, loTick - minTauTick, hiTick - minTauTick).map((stretch) => ({
          stretch,
          weight,
          store,
        })),
      ),
    );
    return {
      stretches,
      pairs: stretches.reduce((sum, { stretch }) => sum + stretch.stop - stretch.start, 0),
    };
  }
}

interface WeightedStretch {
  stretch: KeptStretch;
  weight: number;
  store: KeptPairs;
}

type Windows = NonNullable<TagSpec['window']>;

interface WindowPart {
  name: 'prompt' | 'shifted';
  windows(window: Windows): TauWindow[];
}

const promptOf: WindowPart = { name: 'prompt', windows: ({ loTick, hiTick }) => [{ loTick, hiTick }] };
const shiftedOf: WindowPart = {
  name: 'shifted',
  windows: ({ loTick, hiTick, shiftsTick }) =>
    shiftsTick.map((shift) => ({ loTick: loTick + shift, hiTick: hiTick + shift })),
};

/**
 * Tags out of order: which pairs were found then depends on how far the counting looked, and only the bytes tell what
 * another window would have found.
 */
export function isKeepable(tally: TagTally): boolean {
  return tally.outOfOrder === 0;
}

const known = new Set(['kind', 'tickFs', 'a', 'b', 'histogram', 'window', 'keepPairs']);

/** Whatever else a specification may ask for is not told by pairs. */
function asksOnlyForPairs(spec: TagSpec): boolean {
  return Object.entries(spec).every(([key, value]) => known.has(key) || value === undefined);
}

function isInRange({ minTauTick, maxTauTick }: KeptRange, { histogram, window }: TagSpec): boolean {
  const { loTick, binTick, bins } = histogram;
  if (bins > 0 && (loTick < minTauTick || loTick + bins * binTick - 1 > maxTauTick)) return false;
  if (window === null) return true;
  return [...promptOf.windows(window), ...shiftedOf.windows(window)].every(
    (one) => one.hiTick < one.loTick || (one.loTick >= minTauTick && one.hiTick <= maxTauTick),
  );
}

function emptyPairs({ a, b, window }: TagSpec, slices: number): PairTally {
  const one = window === null ? 0 : 1;
  const pixelsA = a.width * a.height;
  const pixelsB = b.width * b.height;
  const lags = one * (a.width + b.width - 1) * (a.height + b.height - 1);
  return {
    pairs: new Float64Array(slices),
    jointX: new Float64Array(one * slices * a.width * b.width),
    jointY: new Float64Array(one * slices * a.height * b.height),
    imageB: new Float64Array(one * slices * pixelsB),
    imageA: new Float64Array(one * slices * pixelsA),
    difference: new Float64Array(lags),
    sum: new Float64Array(lags),
    matrix: one === 1 && pixelsA * pixelsB <= MATRIX_LIMIT ? new Float64Array(pixelsA * pixelsB) : null,
  };
}

function copyPairs(pairs: PairTally): PairTally {
  return {
    pairs: new Float64Array(pairs.pairs.length),
    jointX: pairs.jointX.slice(),
    jointY: pairs.jointY.slice(),
    imageB: pairs.imageB.slice(),
    imageA: pairs.imageA.slice(),
    difference: pairs.difference.slice(),
    sum: pairs.sum.slice(),
    matrix: pairs.matrix?.slice() ?? null,
  };
}

/** Maps are there: the counts were made with a window. */
function isFull(pairs: PairTally): boolean {
  return pairs.difference.length > 0;
}

/** Every pair of a window is once in the image of arm A. */
function sumPerSlice({ pairs, imageA }: PairTally): void {
  const pixels = imageA.length / Math.max(1, pairs.length);
  for (let k = 0; k < pairs.length; k++) {
    let sum = 0;
    for (let i = k * pixels; i < (k + 1) * pixels; i++) sum += imageA[i]!;
    pairs[k] = sum;
  }
}

/** Row of each ring slot of a store in the maps per slice; slots without a pair may point anywhere. */
function frameSlices(store: KeptPairs, { sliceTick, firstSlice }: TagFrame): Int32Array {
  const slices = slicesOfSlots(Math.log2(sliceTick) - store.bits, store.firstSlice);
  return Int32Array.from(slices, (slice) => slice - firstSlice);
}
