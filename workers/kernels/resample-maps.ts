import type { FrameWasm } from './frame-wasm';

/**
 * Weighted sums of block maps: out[r][cell] = sum_b weights[r][b] * maps[b][cell], the maps of a block bootstrap.
 * All arrays are row-major: maps blocks * cells, weights resamples * blocks, out resamples * cells. Sums are in double
 * precision and in order of blocks, so the compiled twin gives the same bits. O(resamples * blocks * cells). No block
 * gives zeros.
 */
export function resampleMaps(
  maps: Float64Array | Float32Array,
  blocks: number,
  cells: number,
  weights: Float64Array,
  resamples: number,
  out: Float64Array,
): void {
  out.fill(0, 0, resamples * cells);
  for (let r = 0; r < resamples; r++) {
    const row = out.subarray(r * cells, (r + 1) * cells);
    for (let b = 0; b < blocks; b++) {
      const weight = weights[r * blocks + b]!;
      const from = b * cells;
      for (let i = 0; i < cells; i++) row[i]! += weight * maps[from + i]!;
    }
  }
}

/** Resamples made at once: bounds the memory for results, which are handed on batch by batch. */
const BATCH = 32;

/**
 * The same, compiled, a batch at a time: `take` gets index and values of each resample, a view that is good until it
 * returns; it must not place anything in the same module. Its room in the module's memory is given back at the end.
 */
export function eachResample(
  wasm: FrameWasm | null,
  maps: Float64Array | Float32Array,
  blocks: number,
  cells: number,
  weights: Float64Array,
  resamples: number,
  take: (map: Float64Array, index: number) => void,
): void {
  if (wasm === null) {
    const one = new Float64Array(cells);
    for (let r = 0; r < resamples; r++) {
      resampleMaps(maps, blocks, cells, weights.subarray(r * blocks, (r + 1) * blocks), 1, one);
      take(one, r);
    }
    return;
  }
  const mark = wasm.mark;
  try {
    const stride = Math.ceil(cells / 4) * 4;
    const mapsAt = wasm.place(8 * blocks * stride);
    const weightsAt = wasm.place(8 * BATCH * blocks);
    const outAt = wasm.place(8 * BATCH * stride);
    const placed = wasm.f64(mapsAt, blocks * stride);
    for (let b = 0; b < blocks; b++) {
      placed.set(maps.subarray(b * cells, (b + 1) * cells), b * stride);
      placed.fill(0, b * stride + cells, (b + 1) * stride);
    }
    for (let first = 0; first < resamples; first += BATCH) {
      const count = Math.min(BATCH, resamples - first);
      const filled = Math.ceil(count / 4) * 4;
      const batch = wasm.f64(weightsAt, filled * blocks);
      batch.set(weights.subarray(first * blocks, (first + count) * blocks));
      batch.fill(0, count * blocks);
      wasm.call.resampleMaps(mapsAt, blocks, stride, weightsAt, filled, outAt);
      const out = wasm.f64(outAt, filled * stride);
      for (let r = 0; r < count; r++) take(out.subarray(r * stride, r * stride + cells), first + r);
    }
  } finally {
    wasm.release(mark);
  }
}
