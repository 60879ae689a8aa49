import type { PairCandidates, ScanRange } from './tag-scan';
import type { TagWasm } from './tag-wasm';

/** Tags a round of a scan; the kernels' list of survivors holds as many 16-bit numbers. */
const ROUND = 2048;
const WINDOW = 136;
const WINDOW_BYTES = 24;

/** A window of tau and the counters its pairs go to (`PairCounters`). */
export interface PlacedWindow {
  loTick: number;
  hiTick: number;
  countersAt: number;
}

/**
 * Settings of the compiled scans in their module's memory, with their candidate columns. Byte offsets as in
 * wasm/tags-scan.ts. Counts of the histogram are 32 bits wide: `takeHistogram` moves them on.
 */
export class ScanPlan {
  readonly at: number;
  readonly capacity: number;
  readonly #wasm: TagWasm;
  readonly #bins: number;
  readonly #histogramAt: number;
  readonly #columnsAt: readonly number[];

  constructor(
    wasm: TagWasm,
    range: ScanRange,
    bins: number,
    windows: readonly PlacedWindow[],
    collect: boolean,
  ) {
    this.#wasm = wasm;
    this.#bins = bins;
    this.capacity = collect ? 4 * ROUND : 0;
    this.#histogramAt = wasm.place(4 * (bins + 1));
    const listAt = wasm.place(2 * ROUND + 16);
    const room = 8 * (this.capacity + 1);
    this.#columnsAt = [wasm.place(room), wasm.place(room), wasm.place(room), wasm.place(room)];
    this.at = wasm.place(WINDOW + WINDOW_BYTES * windows.length);
    wasm.u32(this.#histogramAt, bins + 1).fill(0);
    const { at } = this;
    wasm
      .i32(at, 12)
      .set([
        range.sitesA,
        bins,
        this.#histogramAt,
        ...this.#columnsAt,
        this.capacity,
        listAt,
        windows.length,
        0,
        collect ? 1 : 0,
      ]);
    const { maxTauTick, minTauTick, loTick, binTick, hullLoTick, hullHiTick } = range;
    wasm.f64(at + 48, 6).set([maxTauTick, -minTauTick, loTick, binTick, hullLoTick, hullHiTick]);
    wasm.i32(at + 120, 3).fill(0);
    windows.forEach(({ loTick: lo, hiTick: hi, countersAt }, w) => {
      wasm.f64(at + WINDOW + WINDOW_BYTES * w, 2).set([lo, hi]);
      wasm.u32(at + WINDOW + WINDOW_BYTES * w + 16, 1).set([countersAt]);
    });
  }

  /** Ring slot of the reference time, its offset into the slice, 1 / slice length. */
  setClock(slot: number, offsetTick: number, perTick: number): void {
    this.#wasm.i32(this.at + 96, 1).set([slot]);
    this.#wasm.f64(this.at + 104, 2).set([offsetTick, perTick]);
  }

  /** The candidates at hand, as views that last until something is placed. */
  candidates(): { count: number; columns: PairCandidates } {
    const [timeAt, tauAt, siteAAt, siteBAt] = this.#columnsAt;
    const { capacity } = this;
    return {
      count: this.#wasm.i32(this.at + 40, 1)[0]!,
      columns: {
        capacity,
        timeA: this.#wasm.f64(timeAt!, capacity),
        tau: this.#wasm.f64(tauAt!, capacity),
        pixelA: this.#wasm.i32(siteAAt!, capacity),
        pixelB: this.#wasm.i32(siteBAt!, capacity),
      },
    };
  }

  /** Adds the delay histogram to `out` and begins it anew. */
  takeHistogram(out: Float64Array): void {
    const counts = this.#wasm.u32(this.#histogramAt, this.#bins);
    for (let i = 0; i < counts.length; i++) out[i]! += counts[i]!;
    counts.fill(0);
  }
}
