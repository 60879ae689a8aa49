import type { PixelArray } from '../../shared/contracts/blocks';

/** Per-frame sums. All write to or add to the caller's arrays. Images are row-major (y, x). */

/** What is done to every pixel before it counts. */
export interface FrameTreatment {
  /** Taken from every pixel first. */
  offset: number;
  /** Photon counting: 1 where the value less `offset` is above it, else 0. Null: the value itself. */
  threshold: number | null;
  /** Every frame is scaled to a mean of 1 over its unmasked pixels. */
  normalised: boolean;
}

/**
 * Takes one frame out of a stack as doubles, treated, masked pixels as 0, and adds it to the sums of I and I^2.
 * Returns the total of the unmasked pixels before they are normalised, and whether all of them and their squares are finite
 * numbers; where not, neither are the sums any more. A frame without light cannot be normalised and stays as it is: its
 * total says so. `start` is the index of the frame's first pixel. O(pixels).
 */
export function takeFrame(
  pixels: PixelArray,
  start: number,
  shape: FrameTreatment & { masked: Uint8Array },
  out: Float64Array,
  sum: Float64Array,
  sumSquares: Float64Array,
): { total: number; finite: boolean } {
  const { masked, offset } = shape;
  let total = 0;
  let squares = 0;
  let open = 0;
  const level = shape.threshold;
  for (let i = 0; i < out.length; i++) {
    let value = masked[i] === 0 ? pixels[start + i]! - offset : 0;
    squares += value * value;
    // A pixel that is no number must not pass for a dark one: `squares` has it before the threshold.
    if (level !== null) value = masked[i] === 0 && value > level ? 1 : 0;
    out[i] = value;
    open += 1 - masked[i]!;
    total += value;
  }
  const factor = shape.normalised ? normalisation(total, open) : 1;
  for (let i = 0; i < out.length; i++) {
    const value = factor * out[i]!;
    out[i] = value;
    sum[i]! += value;
    sumSquares[i]! += value * value;
  }
  return { total, finite: Number.isFinite(squares) };
}

/** Factor to a mean of 1 over `open` pixels; 1 for a frame that has no light to be scaled. */
export function normalisation(total: number, open: number): number {
  return total > 0 ? open / total : 1;
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
