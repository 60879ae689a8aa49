import type { TagWasm } from './tag-wasm';

/** Tags a round of a scan; the kernels' list of survivors holds as many 16-bit numbers. */
const ROUND = 2048;

/** Settings of the compiled delay histogram in its module's memory. Byte offsets as in wasm/tags-scan.ts. */
export class HistogramScan {
  readonly at: number;
  readonly #wasm: TagWasm;
  readonly #bins: number;
  readonly #histogramAt: number;

  constructor(wasm: TagWasm, sitesA: number, loTick: number, binTick: number, bins: number) {
    this.#wasm = wasm;
    this.#bins = bins;
    this.#histogramAt = wasm.place(4 * (bins + 1));
    const listAt = wasm.place(2 * ROUND + 16);
    this.at = wasm.place(48);
    wasm.u32(this.#histogramAt, bins + 1).fill(0);
    wasm.i32(this.at, 4).set([sitesA, bins, this.#histogramAt, listAt]);
    wasm.f64(this.at + 16, 4).set([loTick + bins * binTick - 1, -loTick, loTick, binTick]);
  }

  /** Adds the delay histogram to `out` and begins it anew. Counts are 32 bits wide in between. */
  takeHistogram(out: Float64Array): void {
    const counts = this.#wasm.u32(this.#histogramAt, this.#bins);
    for (let i = 0; i < counts.length; i++) out[i]! += counts[i]!;
    counts.fill(0);
  }
}
