import type { KeptColumns, KeptStretch } from '../kernels/pair-recount';
import type { PairCandidates } from '../kernels/tag-scan';
import { SLICE_LIMIT, type SlotClock, slotOf } from './slice-grid';

/** At most this many buckets of tau a store: a window that moves a little then touches few pairs outside it. */
const BUCKETS = 8192;
/** Offsets inside a bucket are 16 bits wide. */
const MOST_BUCKET_BITS = 16;
/** Bytes of the columns for one pair: offset, both pixels, slot. */
export const BYTES_PER_PAIR = 7;

/** The range of tau that is kept, whole ticks, both ends included. */
export interface KeptRange {
  minTauTick: number;
  maxTauTick: number;
}

/**
 * Pairs of one stretch of an acquisition, sorted into buckets of tau and in order of time inside each: plain data, its
 * buffers transferable. Bucket k holds min + [k * 2^bucketBits, (k + 1) * 2^bucketBits) and fills [starts[k],
 * starts[k + 1]) of the columns.
 */
export interface KeptPairs extends KeptColumns {
  /** Slices of 2^bits ticks; `slot` is the absolute slice index modulo 128, all of them at or after `firstSlice`. */
  bits: number;
  firstSlice: number;
  bucketBits: number;
  starts: Uint32Array;
}

export function bucketsOf({ minTauTick, maxTauTick }: KeptRange): { bucketBits: number; buckets: number } {
  const span = maxTauTick - minTauTick + 1;
  let bucketBits = 0;
  while (bucketBits < MOST_BUCKET_BITS && span / 2 ** bucketBits > BUCKETS) bucketBits += 1;
  return { bucketBits, buckets: Math.ceil(span / 2 ** bucketBits) };
}

/** Pairs as the scans find them, until they are sealed. */
export interface FoundPairs {
  readonly count: number;
  /** Called whenever there are more of them, which is the time to seal many of them. */
  onGrowth: () => void;
  /** Slots after the slice length doubled `doublings` times; `firstSlice` was the first in use before. */
  fold(doublings: number, firstSlice: number): void;
  /** A copy in buckets of tau. Counting sort, O(pairs + buckets). */
  seal(bits: number, firstSlice: number): KeptPairs;
  /** Forgets them. */
  clear(): void;
}

/** In growing columns. */
export class PairColumnsKept implements FoundPairs {
  onGrowth: () => void = () => undefined;
  readonly #range: KeptRange;
  #rise = new Uint32Array(0);
  #pixelA = new Uint16Array(0);
  #pixelB = new Uint16Array(0);
  #slot = new Uint8Array(0);
  count = 0;

  constructor(range: KeptRange) {
    this.#range = range;
  }

  /** The first `count` candidates of a scan; the clock tells the slices of their times. */
  add({ timeA, tau, pixelA, pixelB }: PairCandidates, count: number, clock: SlotClock): void {
    const { minTauTick, maxTauTick } = this.#range;
    this.#reserve(this.count + count);
    const toRise = this.#rise;
    const toA = this.#pixelA;
    const toB = this.#pixelB;
    const toSlot = this.#slot;
    let at = this.count;
    for (let i = 0; i < count; i++) {
      const t = tau[i]!;
      if (t < minTauTick || t > maxTauTick) continue;
      toRise[at] = t - minTauTick;
      toA[at] = pixelA[i]!;
      toB[at] = pixelB[i]!;
      toSlot[at] = slotOf(clock, timeA[i]!);
      at += 1;
    }
    this.count = at;
    this.onGrowth();
  }

  clear(): void {
    this.count = 0;
  }

  fold(doublings: number, firstSlice: number): void {
    const folded = foldSlots(doublings, firstSlice);
    const slot = this.#slot;
    for (let i = 0; i < this.count; i++) slot[i] = folded[slot[i]!]!;
  }

  seal(bits: number, firstSlice: number): KeptPairs {
    const { bucketBits, buckets } = bucketsOf(this.#range);
    const mask = 2 ** bucketBits - 1;
    const count = this.count;
    const rise = this.#rise;
    const fromA = this.#pixelA;
    const fromB = this.#pixelB;
    const fromSlot = this.#slot;
    const starts = new Uint32Array(buckets + 1);
    for (let i = 0; i < count; i++) starts[(rise[i]! >>> bucketBits) + 1]! += 1;
    for (let k = 0; k < buckets; k++) starts[k + 1]! += starts[k]!;
    const next = starts.slice(0, buckets);
    const offset = new Uint16Array(count);
    const pixelA = new Uint16Array(count);
    const pixelB = new Uint16Array(count);
    const slot = new Uint8Array(count);
    for (let i = 0; i < count; i++) {
      const bucket = rise[i]! >>> bucketBits;
      const at = next[bucket]!;
      next[bucket] = at + 1;
      offset[at] = rise[i]! & mask;
      pixelA[at] = fromA[i]!;
      pixelB[at] = fromB[i]!;
      slot[at] = fromSlot[i]!;
    }
    return { bits, firstSlice, bucketBits, starts, offset, pixelA, pixelB, slot };
  }

  #reserve(pairs: number): void {
    if (pairs <= this.#rise.length) return;
    const size = Math.max(4096, pairs, 2 * this.#rise.length);
    this.#rise = grown(this.#rise, new Uint32Array(size));
    this.#pixelA = grown(this.#pixelA, new Uint16Array(size));
    this.#pixelB = grown(this.#pixelB, new Uint16Array(size));
    this.#slot = grown(this.#slot, new Uint8Array(size));
  }
}

/** Every bucket that holds pairs, and its start above the kept minimum. */
export function* wholeStretches(pairs: KeptPairs): Generator<{ stretch: KeptStretch; bucketTick: number }> {
  const { starts, bucketBits } = pairs;
  const width = 2 ** bucketBits;
  for (let k = 0; k + 1 < starts.length; k++) {
    const start = starts[k]!;
    const stop = starts[k + 1]!;
    if (start < stop) yield { stretch: { pairs, start, stop, lo: 0, hi: width - 1 }, bucketTick: k * width };
  }
}

/** Pairs with tau in [lo, hi] above the kept minimum: only the outermost buckets hold others as well. */
export function stretchesIn(pairs: KeptPairs, lo: number, hi: number): KeptStretch[] {
  const { starts, bucketBits } = pairs;
  const width = 2 ** bucketBits;
  const first = Math.floor(lo / width);
  const last = Math.floor(hi / width);
  const part = (from: number, to: number, least: number, most: number): KeptStretch => ({
    pairs,
    start: starts[from]!,
    stop: starts[to]!,
    lo: least,
    hi: most,
  });
  const least = lo - first * width;
  const most = hi - last * width;
  const parts =
    first === last
      ? [part(first, first + 1, least, most)]
      : [
          part(first, first + 1, least, width - 1),
          part(first + 1, last, 0, width - 1),
          part(last, last + 1, 0, most),
        ];
  return parts.filter(({ start, stop }) => start < stop);
}

export function keptBytes(pairs: KeptPairs): number {
  return pairs.offset.length * BYTES_PER_PAIR + pairs.starts.byteLength;
}

/** Absolute slice of each ring slot, divided into slices longer by `doublings` doublings. */
export function slicesOfSlots(doublings: number, firstSlice: number): Float64Array {
  const slices = new Float64Array(SLICE_LIMIT);
  for (let slice = firstSlice; slice < firstSlice + SLICE_LIMIT; slice++) {
    slices[slice & (SLICE_LIMIT - 1)] = Math.floor(slice / 2 ** doublings);
  }
  return slices;
}

export function foldSlots(doublings: number, firstSlice: number): Uint8Array {
  return Uint8Array.from(slicesOfSlots(doublings, firstSlice), (slice) => slice & (SLICE_LIMIT - 1));
}

function grown<T extends Uint32Array | Uint16Array | Uint8Array>(from: T, to: T): T {
  to.set(from);
  return to;
}
