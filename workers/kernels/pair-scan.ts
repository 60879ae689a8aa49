import type { ScanRange } from './tag-scan';
import type { TagWasm } from './tag-wasm';

/** Tags a round of a scan: as many pairs may come at once. */
const ROUND = 2048;
/** Pairs held where nobody keeps them. */
const LEAST_ROOM = 3 * ROUND;
const WINDOW = 152;
const WINDOW_BYTES = 16;
/** Buckets of the table of windows at most. */
const MOST_BUCKETS = 8192;
const SEVERAL = 255;
/** Half of where the kernels cut differences of time off (FARTHEST). */
const MOST_FITTING = 2 ** 29;

/** A window of tau and the counters its pairs go to. */
export interface PlacedWindow {
  loTick: number;
  hiTick: number;
  countersAt: number;
}

/** Largest range of tau: rises above its minimum are 32 bits wide. */
export const MOST_SPAN = 2 ** 32 - 2;

/**
 * Settings of the compiled pair scans in their module's memory, and the columns they fill: rise of tau above the minimum
 * (u32), and pixels A + 65536 B (u32). Byte offsets as in wasm/tags-pairs.ts. Memory: 8 bytes a pair of room.
 */
export class PairScan {
  readonly at: number;
  readonly risesAt: number;
  readonly pixelsAt: number;
  readonly minTauTick: number;
  readonly #wasm: TagWasm;
  readonly #bins: number;
  readonly #histogramAt: number;

  /** `room`: pairs that whoever keeps them lets gather at most. */
  constructor(
    wasm: TagWasm,
    { sitesA, minTauTick, maxTauTick, loTick, binTick }: ScanRange,
    bins: number,
    windows: readonly PlacedWindow[],
    room: number,
  ) {
    this.#wasm = wasm;
    this.#bins = bins;
    this.minTauTick = minTauTick;
    const capacity = Math.max(LEAST_ROOM, room) + 2 * ROUND;
    const span = maxTauTick - minTauTick;
    const risesOf = windows
      .filter(({ loTick: lo, hiTick: hi }) => lo <= hi)
      .map(
        ({ loTick: lo, hiTick: hi, countersAt }) => [lo - minTauTick, hi - minTauTick, countersAt] as const,
      );
    this.#histogramAt = wasm.place(4 * (bins + 1));
    wasm.u32(this.#histogramAt, bins + 1).fill(0);
    const listAt = wasm.place(2 * ROUND + 16);
    const chosenAt = wasm.place(2 * ROUND + 2);
    this.risesAt = wasm.place(4 * (capacity + 4));
    this.pixelsAt = wasm.place(4 * (capacity + 4));
    const { tableAt, tableBits } = placeTable(wasm, span, risesOf);
    this.at = wasm.place(WINDOW + WINDOW_BYTES * risesOf.length);
    const { at, risesAt, pixelsAt } = this;
    const fits = -minTauTick < MOST_FITTING && maxTauTick < MOST_FITTING && minTauTick < MOST_FITTING;
    wasm.u32(at, 38).fill(0);
    wasm
      .u32(at, 12)
      .set([
        sitesA,
        bins,
        this.#histogramAt,
        listAt,
        risesAt,
        pixelsAt,
        capacity,
        0,
        0,
        risesOf.length,
        tableAt,
        tableBits,
      ]);
    wasm.u32(at + 68, 6).set([fits ? 1 : 0, 0, chosenAt, span, loTick - minTauTick, bins * binTick]);
    wasm.f64(at + 96, 4).set([maxTauTick, -minTauTick, minTauTick, binTick]);
    risesOf.forEach((window, w) => {
      wasm.u32(at + WINDOW + WINDOW_BYTES * w, 3).set(window);
    });
  }

  /** Pairs at hand. */
  get pairs(): number {
    return this.#wasm.u32(this.at + 28, 1)[0]!;
  }

  /** Those not counted yet, and the ring slot of the slice all of them lie in. */
  get uncounted(): { pairs: number; slot: number } {
    const [pairs = 0, counted = 0] = this.#wasm.u32(this.at + 28, 2);
    return { pairs: pairs - counted, slot: this.#wasm.u32(this.at + 48, 1)[0]! };
  }

  /** To be called before `scanPairs`: the slice of all pairs to come. */
  setSlot(slot: number): void {
    this.#wasm.u32(this.at + 48, 1)[0] = slot;
  }

  /** To be called before `scanBetween`: slot of the reference time, its offset into the slice, 1 / slice length. */
  setClock(slot: number, offsetTick: number, perTick: number): void {
    this.#wasm.u32(this.at + 144, 1)[0] = slot;
    this.#wasm.f64(this.at + 128, 2).set([offsetTick, perTick]);
  }

  clear(): void {
    this.#wasm.u32(this.at + 28, 2).fill(0);
  }

  /** Adds the delay histogram to `out` and begins it anew. Counts are 32 bits wide in between. */
  takeHistogram(out: Float64Array): void {
    const counts = this.#wasm.u32(this.#histogramAt, this.#bins);
    for (let i = 0; i < counts.length; i++) out[i]! += counts[i]!;
    counts.fill(0);
  }
}

/** For each 2^tableBits ticks which window is there: 0 none, 1 + its index, 255 several. */
function placeTable(
  wasm: TagWasm,
  span: number,
  windows: readonly (readonly [number, number, number])[],
): { tableAt: number; tableBits: number } {
  let tableBits = 0;
  while (span / 2 ** tableBits >= MOST_BUCKETS) tableBits += 1;
  const width = 2 ** tableBits;
  const buckets = Math.floor(span / width) + 1;
  const tableAt = wasm.place(buckets);
  const table = wasm.u8(tableAt, buckets).fill(0);
  windows.forEach(([lo, hi], w) => {
    for (let k = Math.floor(lo / width); k <= Math.floor(hi / width); k++) {
      table[k] = table[k] === 0 && w + 1 < SEVERAL ? w + 1 : SEVERAL;
    }
  });
  return { tableAt, tableBits };
}
