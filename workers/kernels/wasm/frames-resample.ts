// Weighted sums of block maps, compiled; the readable twin is `resampleMaps` (../resample-maps.ts). Arguments are byte
// addresses in the caller's memory.

/** Cells a tile: 50 maps of it fit the first-level cache. */
const TILE: i32 = 64;

@inline
function splat(at: usize): v128 {
  return v128.load64_splat(at);
}

/** Four resamples of four cells: map values are used four times, weights twice, and nothing is stored on the way. */
@inline
function fourByFour(
  maps: usize, mapBytes: usize, blocks: i32, weights: usize, weightBytes: usize, to: usize, toBytes: usize,
): void {
  let a0 = f64x2.splat(0);
  let a1 = a0;
  let b0 = a0;
  let b1 = a0;
  let c0 = a0;
  let c1 = a0;
  let d0 = a0;
  let d1 = a0;
  for (let block = 0; block < blocks; block++) {
    const low = v128.load(maps);
    const high = v128.load(maps, 16);
    const a = splat(weights);
    const b = splat(weights + weightBytes);
    const c = splat(weights + 2 * weightBytes);
    const d = splat(weights + 3 * weightBytes);
    a0 = f64x2.add(a0, f64x2.mul(a, low));
    a1 = f64x2.add(a1, f64x2.mul(a, high));
    b0 = f64x2.add(b0, f64x2.mul(b, low));
    b1 = f64x2.add(b1, f64x2.mul(b, high));
    c0 = f64x2.add(c0, f64x2.mul(c, low));
    c1 = f64x2.add(c1, f64x2.mul(c, high));
    d0 = f64x2.add(d0, f64x2.mul(d, low));
    d1 = f64x2.add(d1, f64x2.mul(d, high));
    maps += mapBytes;
    weights += 8;
  }
  v128.store(to, a0);
  v128.store(to, a1, 16);
  v128.store(to + toBytes, b0);
  v128.store(to + toBytes, b1, 16);
  v128.store(to + 2 * toBytes, c0);
  v128.store(to + 2 * toBytes, c1, 16);
  v128.store(to + 3 * toBytes, d0);
  v128.store(to + 3 * toBytes, d1, 16);
}

/**
 * out[r][cell] = sum over blocks of weights[r][block] * maps[block][cell], all f64. `cells` and `resamples` are multiples
 * of 4; the caller fills up.
 */
export function resampleMaps(
  maps: usize, blocks: i32, cells: i32, weights: usize, resamples: i32, out: usize,
): void {
  const mapBytes = <usize>cells << 3;
  const weightBytes = <usize>blocks << 3;
  for (let tile = 0; tile < cells; tile += TILE) {
    const end = min(tile + TILE, cells);
    for (let r = 0; r < resamples; r += 4) {
      const row = weights + <usize>r * weightBytes;
      const to = out + <usize>r * mapBytes;
      for (let cell = tile; cell < end; cell += 4) {
        const at = <usize>cell << 3;
        fourByFour(maps + at, mapBytes, blocks, row, weightBytes, to + at, mapBytes);
      }
    }
  }
}
