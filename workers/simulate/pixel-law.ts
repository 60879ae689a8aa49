import { normalCdf } from '../../shared/physics/special';
import type { AxisLaw } from './pair-source';
import type { Bins } from './receivers';

/** Where the photons of one axis land: probabilities, not normalised to what is caught. */
export interface PixelLaw {
  /** [idler bin][signal bin], both photons of a pair. */
  joint: Float64Array;
  /** Each photon for itself. */
  signal: Float64Array;
  idler: Float64Array;
}

/** Nodes and weights of 8-point Gauss-Legendre on [-1, 1], positive half (Abramowitz & Stegun, table 25.4). */
const NODES = [0.1834346424956498, 0.525532409916329, 0.7966664774136267, 0.9602898564975363];
const WEIGHTS = [0.362683783378362, 0.3137066458778873, 0.2223810344533745, 0.1012285362903763];

/**
 * The double Gaussian integrated over pixels: exactly over the idler (normal integral), by Gauss-Legendre over the
 * signal in steps of a quarter of the conditional width.
 */
export function pixelLaw(law: AxisLaw, signalBins: Bins, idlerBins: Bins): PixelLaw {
  const mean = law.sigmaMean ** 2;
  const half = law.sigmaHalf ** 2;
  const sigmaS = law.scaleSignal * Math.sqrt(mean + half);
  const sigmaI = law.scaleIdler * Math.sqrt(mean + half);
  const slope = (law.scaleIdler / law.scaleSignal) * ((mean - half) / (mean + half));
  // Var(X2|X1) = s2^2 4 m h / (m + h), without the cancellation of V2 - C^2/V1.
  const conditional = law.scaleIdler * Math.sqrt((4 * mean * half) / (mean + half));

  const columns = signalBins.low.length;
  const rows = idlerBins.low.length;
  const joint = new Float64Array(rows * columns);
  for (let s = 0; s < columns; s++) {
    const low = signalBins.low[s]!;
    const width = signalBins.high[s]! - low;
    const steps = Math.max(1, Math.ceil(width / (0.25 * Math.min(conditional, sigmaS))));
    const halfStep = width / steps / 2;
    for (let step = 0; step < steps; step++) {
      const centre = low + (2 * step + 1) * halfStep;
      for (let k = 0; k < 8; k++) {
        const at = centre + halfStep * (k < 4 ? -NODES[k]! : NODES[k - 4]!);
        const density = Math.exp(-0.5 * (at / sigmaS) ** 2) / (sigmaS * Math.sqrt(2 * Math.PI));
        const weight = halfStep * WEIGHTS[k % 4]! * density;
        for (let i = 0; i < rows; i++) {
          const upper = normalCdf((idlerBins.high[i]! - slope * at) / conditional);
          const lower = normalCdf((idlerBins.low[i]! - slope * at) / conditional);
          joint[i * columns + s]! += weight * (upper - lower);
        }
      }
    }
  }
  return { joint, signal: normalBins(signalBins, sigmaS), idler: normalBins(idlerBins, sigmaI) };
}

function normalBins(bins: Bins, sigma: number): Float64Array {
  return bins.low.map((low, i) => normalCdf(bins.high[i]! / sigma) - normalCdf(low / sigma));
}

/** Second moments of a joint table [second][first] whose bins stand at the given places. */
export interface JointMoments {
  minus: number;
  plus: number;
  /** Mean over the second coordinate of the variance of the first. */
  conditional: number;
}

export function jointMoments(joint: Float64Array, first: Float64Array, second: Float64Array): JointMoments {
  const columns = first.length;
  const sums = { n: 0, minus: 0, plus: 0, minus2: 0, plus2: 0, conditional: 0 };
  for (let b = 0; b < second.length; b++) {
    let n = 0;
    let x = 0;
    let x2 = 0;
    for (let a = 0; a < columns; a++) {
      const p = joint[b * columns + a]!;
      const minus = first[a]! - second[b]!;
      const plus = first[a]! + second[b]!;
      n += p;
      x += p * first[a]!;
      x2 += p * first[a]! ** 2;
      sums.minus += p * minus;
      sums.plus += p * plus;
      sums.minus2 += p * minus ** 2;
      sums.plus2 += p * plus ** 2;
    }
    sums.n += n;
    if (n > 0) sums.conditional += x2 - x ** 2 / n;
  }
  return {
    minus: sums.minus2 / sums.n - (sums.minus / sums.n) ** 2,
    plus: sums.plus2 / sums.n - (sums.plus / sums.n) ** 2,
    conditional: sums.conditional / sums.n,
  };
}
