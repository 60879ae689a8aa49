import { type CountArray, type PlaceCounts, placeInHeap } from './count-array';

/**
 * The slices of time that serve as bootstrap blocks: 2^bits ticks each, counted from tick 0 of the acquisition. The
 * length doubles as the run grows, so that the span of tags needs at most 128. It depends on the first and last tag
 * alone, so any chunking and any split end with the same slices.
 */
export const SLICE_LIMIT = 128;
const SLOT_MASK = SLICE_LIMIT - 1;
/** The shortest slice is the smallest power of two ticks that lasts at least 10 us. */
const SHORTEST_SLICE_FS = 1e10;

export class SliceGrid {
  bits: number;
  firstTick: bigint | null = null;
  lastTick: bigint | null = null;

  /** Slices are at least 2^leastBits ticks long: where it is known that the whole run needs that. */
  constructor(tickFs: number, leastBits = 0) {
    this.bits = Math.max(0, Math.ceil(Math.log2(SHORTEST_SLICE_FS / tickFs)));
    // log2 may round either way at an exact power of two.
    while (this.bits > 0 && 2 ** (this.bits - 1) * tickFs >= SHORTEST_SLICE_FS) this.bits -= 1;
    while (2 ** this.bits * tickFs < SHORTEST_SLICE_FS) this.bits += 1;
    this.bits = Math.max(this.bits, leastBits);
  }

  get sliceTick(): number {
    return 2 ** this.bits;
  }

  /** Absolute index of the first slice in use, 0 when there is none. Shifting a bigint floors, also below tick 0. */
  get first(): number {
    return this.firstTick === null ? 0 : Number(this.firstTick >> BigInt(this.bits));
  }

  get count(): number {
    if (this.lastTick === null) return 0;
    return Number(this.lastTick >> BigInt(this.bits)) - this.first + 1;
  }

  /** Grows to hold both ticks. Returns how many times the length doubled: rings must be folded by as much. */
  cover(fromTick: bigint, toTick: bigint): number {
    const before = this.bits;
    if (this.firstTick === null || fromTick < this.firstTick) this.firstTick = fromTick;
    if (this.lastTick === null || toTick > this.lastTick) this.lastTick = toTick;
    while (this.count > SLICE_LIMIT) this.bits += 1;
    return this.bits - before;
  }

  /** How to find the ring slot of a time given in ticks after `refTick`; good until the next `cover`. */
  clockAt(refTick: bigint): SlotClock {
    const bits = BigInt(this.bits);
    const slice = refTick >> bits;
    return {
      slot: Number(slice & BigInt(SLOT_MASK)),
      offsetTick: Number(refTick - (slice << bits)),
      perTick: 2 ** -this.bits,
    };
  }
}

export interface SlotClock {
  slot: number;
  offsetTick: number;
  /** 1 / sliceTick, a power of two: multiplying by it is exact. */
  perTick: number;
}

export function slotOf(clock: SlotClock, time: number): number {
  return (clock.slot + Math.floor((time + clock.offsetTick) * clock.perTick)) & SLOT_MASK;
}

/** First time past the slice of `time`, against the same reference. */
export function sliceEnd(clock: SlotClock, time: number): number {
  return (Math.floor((time + clock.offsetTick) * clock.perTick) + 1) / clock.perTick - clock.offsetTick;
}

/** Slot of an absolute slice index. Bit operators keep the low bits of any whole number below 2^53, also negative. */
function slotOfSlice(slice: number): number {
  return slice & SLOT_MASK;
}

/**
 * `cells` counters for each slice in use. At most 128 slices in a row are in use, so the slot is the absolute index
 * modulo 128 and nothing moves as the run grows at either end.
 */
export class SliceRing {
  readonly cells: number;
  readonly #counters: CountArray;

  constructor(cells: number, place: PlaceCounts = placeInHeap) {
    this.cells = cells;
    this.#counters = place(cells * SLICE_LIMIT);
  }

  get counts(): Float64Array {
    return this.#counters.values;
  }

  /** Joins slices after the length doubled `doublings` times; [first, first + count) were in use before. */
  fold(doublings: number, first: number, count: number): void {
    const { counts, cells } = this;
    if (doublings === 0 || count === 0 || cells === 0) return;
    const firstAfter = Math.floor(first / 2 ** doublings);
    const after = Math.floor((first + count - 1) / 2 ** doublings) - firstAfter + 1;
    const joined = roomFor(after * cells);
    for (let slice = first; slice < first + count; slice++) {
      const from = slotOfSlice(slice) * cells;
      const to = (Math.floor(slice / 2 ** doublings) - firstAfter) * cells;
      for (let i = 0; i < cells; i++) joined[to + i]! += counts[from + i]!;
      counts.fill(0, from, from + cells);
    }
    for (let i = 0; i < after; i++) {
      counts.set(joined.subarray(i * cells, (i + 1) * cells), slotOfSlice(firstAfter + i) * cells);
    }
  }

  /** Adds `count` slices in order of time, as `toDense` gives them, that are shorter by `doublings` doublings. */
  addDense(dense: Float64Array, first: number, count: number, doublings: number): void {
    for (let i = 0; i < count; i++) {
      this.#addSlot(Math.floor((first + i) / 2 ** doublings), dense, i * this.cells);
    }
  }

  /** A copy in order of time, [slice][cell]. */
  toDense(first: number, count: number): Float64Array {
    const dense = new Float64Array(count * this.cells);
    const { counts } = this;
    for (let i = 0; i < count; i++) {
      const from = slotOfSlice(first + i) * this.cells;
      dense.set(counts.subarray(from, from + this.cells), i * this.cells);
    }
    return dense;
  }

  #addSlot(slice: number, from: Float64Array, fromIndex: number): void {
    const to = slotOfSlice(slice) * this.cells;
    const { counts, cells } = this;
    for (let i = 0; i < cells; i++) counts[to + i]! += from[fromIndex + i]!;
  }
}

let room = new Float64Array(0);

/** Zeros, good until the next call: a run folds its rings many times, and new memory costs more than the sums. */
function roomFor(length: number): Float64Array {
  if (room.length < length) room = new Float64Array(length);
  return room.subarray(0, length).fill(0);
}
