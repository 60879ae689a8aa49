import { type Estimate, propagate } from './estimate';

/** Mean counts per pixel in a region, raw and shifted-window, with the variances of these means. */
export interface RegionMean {
  raw: number;
  rawVariance: number;
  /** Mean accidentals per pixel (shifted counts over the number of windows) and its variance. */
  accidentals: number;
  accidentalsVariance: number;
}

/** Visibility (open - closed)/(open + closed) of two mean levels; 0 when both are. */
export function visibilityOf(open: number, closed: number): number {
  return open + closed === 0 ? 0 : (open - closed) / (open + closed);
}

/** CNR of one open pixel against one closed pixel, (open - closed)/sqrt(variance of both). */
export function contrastToNoise(open: number, closed: number, variances: number): number {
  return (open - closed) / Math.sqrt(variances);
}

/** Visibility of raw or net levels, Poisson propagation over the four independent region counts. */
export function ghostVisibility(open: RegionMean, closed: RegionMean, net: boolean): Estimate {
  return fromRegions(open, closed, net, (o, c) => visibilityOf(o, c));
}

/**
 * CNR per pixel. A pixel's counts are Poisson, so its variance is its mean; after subtraction the variance of the
 * subtracted accidentals, A/m for m shifted windows, is added. Raw, with S pairs above B accidentals, this is
 * S/sqrt(S + 2 B). Pittman, Shih, Strekalov & Sergienko, Phys. Rev. A 52, R3429 (1995), from memory, for the image;
 * the CNR is Poisson statistics. A region of n pixels has sqrt(n) times this.
 */
export function ghostContrastToNoise(
  open: RegionMean,
  closed: RegionMean,
  windows: number,
  net: boolean,
): Estimate {
  return fromRegions(open, closed, net, (o, c, x) => {
    const extra = net ? (x[1]! + x[3]!) / windows : 0;
    return contrastToNoise(o, c, x[0]! + x[2]! + extra);
  });
}

function fromRegions(
  open: RegionMean,
  closed: RegionMean,
  net: boolean,
  f: (open: number, closed: number, means: readonly number[]) => number,
): Estimate {
  const means = [open.raw, open.accidentals, closed.raw, closed.accidentals];
  const variances = [
    open.rawVariance,
    open.accidentalsVariance,
    closed.rawVariance,
    closed.accidentalsVariance,
  ];
  return propagate((x) => (net ? f(x[0]! - x[1]!, x[2]! - x[3]!, x) : f(x[0]!, x[2]!, x)), means, variances);
}

/**
 * Level that parts values into two groups with the largest variance between them. Otsu, IEEE Trans. Syst. Man Cybern. 9,
 * 62 (1979), from memory. Exact: every gap between neighbouring values is tried. Null for fewer than two different values.
 */
export function otsuThreshold(values: ArrayLike<number>): number | null {
  const sorted = Float64Array.from(values).sort();
  const n = sorted.length;
  let total = 0;
  for (const value of sorted) total += value;
  let below = 0;
  let best = Number.NEGATIVE_INFINITY;
  let threshold: number | null = null;
  for (let k = 1; k < n; k++) {
    below += sorted[k - 1]!;
    if (sorted[k]! === sorted[k - 1]!) continue;
    const gap = (total - below) / (n - k) - below / k;
    const between = k * (n - k) * gap ** 2;
    if (between > best) {
      best = between;
      threshold = (sorted[k]! + sorted[k - 1]!) / 2;
    }
  }
  return threshold;
}
