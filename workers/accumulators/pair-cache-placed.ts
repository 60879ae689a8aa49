import type { PairScan } from '../kernels/pair-scan';
import type { TagWasm } from '../kernels/tag-wasm';
import { bucketsOf, type FoundPairs, foldSlots, type KeptPairs, type KeptRange } from './pair-cache-store';

/** Pairs copied out of the module at a time. */
const PIECE = 2 ** 14;

/** Pairs in the columns of a compiled scan, where nothing moves them until they are sealed. */
export class PlacedPairs implements FoundPairs {
  onGrowth: () => void = () => undefined;
  readonly #wasm: TagWasm;
  readonly #scan: PairScan;
  readonly #range: KeptRange;
  /** Ring slots of the pairs, as many of one slot as come in a row. */
  #runs: { slot: number; pairs: number }[] = [];

  /** `range` may be a part of what is scanned: the others are left out when sealing. */
  constructor(wasm: TagWasm, scan: PairScan, range: KeptRange) {
    this.#wasm = wasm;
    this.#scan = scan;
    this.#range = range;
  }

  get count(): number {
    return this.#scan.pairs;
  }

  /** The scan has come to so many more. */
  add(slot: number, pairs: number): void {
    const last = this.#runs[this.#runs.length - 1];
    if (last?.slot === slot) last.pairs += pairs;
    else this.#runs.push({ slot, pairs });
  }

  fold(doublings: number, firstSlice: number): void {
    const folded = foldSlots(doublings, firstSlice);
    this.#runs = this.#runs.map(({ slot, pairs }) => ({ slot: folded[slot]!, pairs }));
  }

  clear(): void {
    this.#scan.clear();
    this.#runs = [];
  }

  seal(bits: number, firstSlice: number): KeptPairs {
    const wasm = this.#wasm;
    const { call, mark } = wasm;
    const { count } = this;
    const { bucketBits, buckets } = bucketsOf(this.#range);
    const { risesAt, pixelsAt, minTauTick } = this.#scan;
    const lowest = this.#range.minTauTick - minTauTick;
    const span = this.#range.maxTauTick - this.#range.minTauTick;
    const nextAt = wasm.place(4 * buckets);
    const sortedAt = wasm.place(8 * (count + 8));
    wasm.u32(nextAt, buckets).fill(0);
    call.countBuckets(risesAt, count, lowest, span, bucketBits, nextAt);
    const starts = startsOf(wasm.u32(nextAt, buckets));
    wasm.u32(nextAt, buckets).set(starts.subarray(0, buckets));
    let at = 0;
    for (const { slot, pairs } of this.#runs) {
      const [riseAt, pixelAt] = [risesAt + 4 * at, pixelsAt + 4 * at];
      call.toBuckets(riseAt, pixelAt, pairs, lowest, span, bucketBits, slot, nextAt, sortedAt);
      at += pairs;
    }
    const columns = this.#columnsOf(sortedAt, starts[buckets]!);
    wasm.release(mark);
    return { bits, firstSlice, bucketBits, starts, ...columns };
  }

  #columnsOf(sortedAt: number, count: number) {
    const wasm = this.#wasm;
    const offset = new Uint16Array(count);
    const pixelA = new Uint16Array(count);
    const pixelB = new Uint16Array(count);
    const slot = new Uint8Array(count);
    const offsetAt = wasm.place(2 * PIECE);
    const pixelAAt = wasm.place(2 * PIECE);
    const pixelBAt = wasm.place(2 * PIECE);
    const slotAt = wasm.place(PIECE);
    for (let start = 0; start < count; start += PIECE) {
      const some = Math.min(PIECE, count - start);
      wasm.call.toColumns(sortedAt + 8 * start, some, offsetAt, pixelAAt, pixelBAt, slotAt);
      offset.set(wasm.u16(offsetAt, some), start);
      pixelA.set(wasm.u16(pixelAAt, some), start);
      pixelB.set(wasm.u16(pixelBAt, some), start);
      slot.set(wasm.u8(slotAt, some), start);
    }
    return { offset, pixelA, pixelB, slot };
  }
}

function startsOf(counts: Uint32Array): Uint32Array {
  const starts = new Uint32Array(counts.length + 1);
  for (let k = 0; k < counts.length; k++) starts[k + 1] = starts[k]! + counts[k]!;
  return starts;
}
