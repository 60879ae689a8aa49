import type { PixelArray } from '../../shared/contracts/blocks';

/** Per-frame sums. All write to or add to the caller's arrays. Images are row-major (y, x). */

/**
 * Copies one frame out of a stack as doubles, masked pixels as 0, and adds it to the sums of I and I^2.
 * Returns the totals of the unmasked pixels and of their squares; where the latter is not finite, neither are the sums
 * any more. `start` is the index of the frame's first pixel.
 */
export function takeFrame(
  pixels: PixelArray,
  start: number,
  masked: Uint8Array,
  out: Float64Array,
  sum: Float64Array,
  sumSquares: Float64Array,
): { total: number; squares: number } {
  let total = 0;
  let squares = 0;
  for (let i = 0; i < out.length; i++) {
    const value = masked[i] === 0 ? pixels[start + i]! : 0;
    out[i] = value;
    sum[i]! += value;
    sumSquares[i]! += value * value;
    total += value;
    squares += value * value;
  }
  return { total, squares };
}

/** out = x - y */
export function subtract(x: Float64Array, y: Float64Array, out: Float64Array): void {
  for (let i = 0; i < out.length; i++) out[i] = x[i]! - y[i]!;
}

/** diagonal[i] += scale * x[i] * y[i] */
export function addDiagonal(x: Float64Array, y: Float64Array, scale: number, diagonal: Float64Array): void {
  for (let i = 0; i < diagonal.length; i++) diagonal[i]! += scale * x[i]! * y[i]!;
}

/** columns[x] = sum over y, rows[y] = sum over x of an image. */
export function projectFrame(image: Float64Array, columns: Float64Array, rows: Float64Array): void {
  columns.fill(0);
  const width = columns.length;
  for (let y = 0; y < rows.length; y++) {
    let total = 0;
    for (let x = 0; x < width; x++) {
      const value = image[y * width + x]!;
      columns[x]! += value;
      total += value;
    }
    rows[y] = total;
  }
}

/** out[j][i] += scale * (u[i] v[j] + v[i] u[j])/2, the symmetrised outer product of two vectors of one length. */
export function addOuter(u: Float64Array, v: Float64Array, scale: number, out: Float64Array): void {
  const n = u.length;
  const half = scale / 2;
  for (let j = 0; j < n; j++) {
    const uj = half * u[j]!;
    const vj = half * v[j]!;
    const row = j * n;
    for (let i = 0; i < n; i++) out[row + i]! += u[i]! * vj + v[i]! * uj;
  }
}
