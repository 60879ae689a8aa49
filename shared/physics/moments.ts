import type { PairCovariance } from './double-gaussian';

/**
 * Second moments of joint maps [x2][x1] in pixel indices. All are built from six sums that are linear in the counts, so
 * subtracting accidentals and resampling slices act on the sums alone.
 */
export const MOMENT_SUMS = 6;

/** Adds scale * (n, sum x1, sum x2, sum x1^2, sum x2^2, sum x1 x2) of one map at `map[offset...]` to out[at...]. */
export function addMomentSums(
  map: Float64Array,
  offset: number,
  n1: number,
  n2: number,
  scale: number,
  out: Float64Array,
  at: number,
): void {
  for (let x2 = 0; x2 < n2; x2 += 1) {
    let n = 0;
    let s1 = 0;
    let s11 = 0;
    for (let x1 = 0; x1 < n1; x1 += 1) {
      const count = map[offset + x2 * n1 + x1] as number;
      n += count;
      s1 += count * x1;
      s11 += count * x1 * x1;
    }
    const add = [n, s1, n * x2, s11, n * x2 * x2, s1 * x2];
    for (let p = 0; p < MOMENT_SUMS; p += 1)
      out[at + p] = (out[at + p] as number) + scale * (add[p] as number);
  }
}

/** Covariance from the six sums; null when no net count is left. Divisor n: at 200 pairs the difference is 0.5 %. */
export function covarianceOfSums(sums: Float64Array, at = 0): PairCovariance | null {
  const n = sums[at] as number;
  if (!(n > 0)) return null;
  const m1 = (sums[at + 1] as number) / n;
  const m2 = (sums[at + 2] as number) / n;
  return {
    v1: (sums[at + 3] as number) / n - m1 * m1,
    v2: (sums[at + 4] as number) / n - m2 * m2,
    c: (sums[at + 5] as number) / n - m1 * m2,
  };
}

/** Flat pedestal with fraction f of the counts over +-W on a peak of width s: f adds f (W^2/3 - s^2). */
export function pedestalVariance(sigma: number, fraction: number, halfWindow: number): number {
  return sigma * sigma + fraction * ((halfWindow * halfWindow) / 3 - sigma * sigma);
}

/** Rotated ellipse to covariance [xx, xy, yy]; angle of axis a from +x in degrees. Witnesses need the marginal xx. */
export function ellipseCovariance(
  sigmaA: number,
  sigmaB: number,
  angleDeg: number,
): [number, number, number] {
  const cos = Math.cos((angleDeg * Math.PI) / 180);
  const sin = Math.sin((angleDeg * Math.PI) / 180);
  const a = sigmaA * sigmaA;
  const b = sigmaB * sigmaB;
  return [a * cos * cos + b * sin * sin, (a - b) * sin * cos, a * sin * sin + b * cos * cos];
}

/** Relative error of sigma from n pairs on flat background b per unit length, b known: sqrt(1/(2n) + 4 sqrt(pi) s b/n^2). */
export function sigmaRelativeError1d(n: number, sigma: number, perUnit: number): number {
  return Math.sqrt(1 / (2 * n) + (4 * Math.sqrt(Math.PI) * sigma * perUnit) / (n * n));
}

/** Same for a round 2-D peak on b per unit area: sqrt(1/(4n) + 4 pi s^2 b/n^2). */
export function sigmaRelativeError2d(n: number, sigma: number, perArea: number): number {
  return Math.sqrt(1 / (4 * n) + (4 * Math.PI * sigma * sigma * perArea) / (n * n));
}
