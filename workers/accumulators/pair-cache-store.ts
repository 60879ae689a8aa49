import { SLICE_LIMIT } from './slice-grid';

/** About this many buckets of tau a store: a window then touches few pairs outside it. */
const BUCKETS = 1024;
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
export interface KeptPairs {
  /** Slices of 2^bits ticks; `slot` is the absolute slice index modulo 128, all of them at or after `firstSlice`. */
  bits: number;
  firstSlice: number;
  bucketBits: number;
  starts: Uint32Array;
  /** tau above the start of its bucket. */
  offset: Uint16Array;
  pixelA: Uint16Array;
  pixelB: Uint16Array;
  slot: Uint8Array;
}

export function bucketBitsOf({ minTauTick, maxTauTick }: KeptRange): number {
  const span = maxTauTick - minTauTick + 1;
  let bits = 0;
  while (bits < MOST_BUCKET_BITS && span / 2 ** bits > BUCKETS) bits += 1;
  return bits;
}

/** Growing columns of pairs as the scans find them. */
export class PairColumnsKept {
  readonly #range: KeptRange;
  #rise = new Uint32Array(0);
  #pixelA = new Uint16Array(0);
  #pixelB = new Uint16Array(0);
  #slot = new Uint8Array(0);
  count = 0;

  constructor(range: KeptRange) {
    this.#range = range;
  }

  add(tau: number, pixelA: number, pixelB: number, slot: number): void {
    const { minTauTick, maxTauTick } = this.#range;
    if (tau < minTauTick || tau > maxTauTick) return;
    if (this.count === this.#rise.length) this.#grow();
    const at = this.count;
    this.#rise[at] = tau - minTauTick;
    this.#pixelA[at] = pixelA;
    this.#pixelB[at] = pixelB;
    this.#slot[at] = slot;
    this.count = at + 1;
  }

  /** Slots after the slice length doubled `doublings` times; `firstSlice` was the first in use before. */
  fold(doublings: number, firstSlice: number): void {
    const folded = foldSlots(doublings, firstSlice);
    const slot = this.#slot;
    for (let i = 0; i < this.count; i++) slot[i] = folded[slot[i]!]!;
  }

  /** A copy in buckets of tau. Counting sort, O(pairs + buckets). */
  seal(bits: number, firstSlice: number): KeptPairs {
    const { minTauTick, maxTauTick } = this.#range;
    const bucketBits = bucketBitsOf(this.#range);
    const buckets = Math.floor((maxTauTick - minTauTick) / 2 ** bucketBits) + 1;
    const mask = 2 ** bucketBits - 1;
    const count = this.count;
    const rise = this.#rise;
    const starts = new Uint32Array(buckets + 1);
    for (let i = 0; i < count; i++) starts[(rise[i]! >>> bucketBits) + 1]! += 1;
    for (let k = 0; k < buckets; k++) starts[k + 1]! += starts[k]!;
    const next = starts.slice(0, buckets);
    const offset = new Uint16Array(count);
    const pixelA = new Uint16Array(count);
    const pixelB = new Uint16Array(count);
    const slot = new Uint8Array(count);
    for (let i = 0; i < count; i++) {
      const at = next[rise[i]! >>> bucketBits]!++;
      offset[at] = rise[i]! & mask;
      pixelA[at] = this.#pixelA[i]!;
      pixelB[at] = this.#pixelB[i]!;
      slot[at] = this.#slot[i]!;
    }
    return { bits, firstSlice, bucketBits, starts, offset, pixelA, pixelB, slot };
  }

  #grow(): void {
    const size = Math.max(4096, 2 * this.#rise.length);
    this.#rise = grown(this.#rise, new Uint32Array(size));
    this.#pixelA = grown(this.#pixelA, new Uint16Array(size));
    this.#pixelB = grown(this.#pixelB, new Uint16Array(size));
    this.#slot = grown(this.#slot, new Uint8Array(size));
  }
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

function foldSlots(doublings: number, firstSlice: number): Uint8Array {
  return Uint8Array.from(slicesOfSlots(doublings, firstSlice), (slice) => slice & (SLICE_LIMIT - 1));
}

function grown<T extends Uint32Array | Uint16Array | Uint8Array>(from: T, to: T): T {
  to.set(from);
  return to;
}
