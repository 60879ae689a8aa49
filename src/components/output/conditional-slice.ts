import type { Axis, MapData } from '../../../shared/contracts/output';

export interface Estimate {
  value: number;
  sigma: number;
}

export interface ConditionalSlice {
  /** P(other | given), normalised to one over the bins not masked; empty when there are too few pairs. */
  map: MapData;
  given: { axis: Axis; at: number };
  /** Sum over the slice, in the unit of the map. */
  total: number;
  /** Standard error of the sum; null where the map tells none and does not count anything. */
  totalSigma: number | null;
  /** Whether the sum stands out of its error, so that dividing by it means something. */
  carries: boolean;
  /** Moments over the whole slice; null when the sum does not carry them or their errors are not known. */
  mean: Estimate | null;
  width: Estimate | null;
}

/** Below this many standard errors the sum of a slice is noise, and normalising by it says nothing. */
const LEAST_SIGNIFICANCE = 5;

/**
 * The column (`given` "x") or row (`given` "y") of a joint map through a bin, as a conditional distribution.
 *
 * m = sum(w u)/W, V = sum(w (u - m)^2)/W, W = sum(w). Standard errors to first order from the bins' own errors s_i
 * (Poisson, s_i^2 = w_i, where a map of counts carries none; no moments for other maps without errors): SE_m = sqrt(sum s_i^2 (u_i - m)^2)/W,
 * SE_V = sqrt(sum s_i^2 ((u_i - m)^2 - V)^2)/W, SE_sigma = SE_V/(2 sigma). Moments of the whole slice: a background left
 * in it widens them, so the fitted widths of the study are the ones to quote. A map that carries its own errors may hold
 * negative bins; when these make V negative there is no width.
 */
export function computeSlice(map: MapData, given: 'x' | 'y', ix: number, iy: number): ConditionalSlice {
  const [ny = 0, nx = 0] = map.shape;
  const [axisX, axisY] = [map.axes[0]!, map.axes[1]!];
  const count = given === 'x' ? ny : nx;
  const indexOf = (k: number): number => (given === 'x' ? k * nx + ix : iy * nx + k);
  const axis = given === 'x' ? axisY : axisX;
  const fixed =
    given === 'x'
      ? { axis: axisX, at: axisX.start + ix * axisX.step }
      : { axis: axisY, at: axisY.start + iy * axisY.step };

  const isCounted = map.unit === 'pairs' || map.unit === 'counts';
  const hasErrors = map.sigma !== undefined || isCounted;

  const weights = new Float64Array(count);
  const errors = new Float64Array(count);
  const masked = new Uint8Array(count);
  let total = 0;
  let totalVariance = 0;
  for (let k = 0; k < count; k++) {
    const index = indexOf(k);
    const weight = map.data[index]!;
    if (map.masked?.[index] === 1 || !Number.isFinite(weight)) {
      masked[k] = 1;
      continue;
    }
    weights[k] = weight;
    errors[k] = map.sigma ? map.sigma[index]! : isCounted ? Math.sqrt(Math.max(0, weight)) : 0;
    total += weight;
    totalVariance += errors[k]! ** 2;
  }
  const totalSigma = hasErrors ? Math.sqrt(totalVariance) : null;
  const carries = total > LEAST_SIGNIFICANCE * (totalSigma ?? 0);
  const scale = carries ? 1 / total : 0;
  const slice: MapData = {
    label: `${axis.label}, given ${fixed.axis.label}`,
    shape: [count],
    axes: [axis],
    unit: '1',
    scale: 'counts',
    data: weights.map((w) => w * scale),
    ...(hasErrors ? { sigma: errors.map((e) => e * scale) } : {}),
    masked,
  };
  const moments =
    carries && hasErrors ? computeMoments(weights, errors, axis, total) : { mean: null, width: null };
  return { map: slice, given: fixed, total, totalSigma, carries, ...moments };
}

function computeMoments(
  weights: Float64Array,
  errors: Float64Array,
  axis: Axis,
  total: number,
): { mean: Estimate; width: Estimate | null } {
  const at = (k: number): number => axis.start + k * axis.step;
  let mean = 0;
  for (let k = 0; k < weights.length; k++) mean += (weights[k]! * at(k)) / total;
  let variance = 0;
  let meanError = 0;
  for (let k = 0; k < weights.length; k++) {
    const square = (at(k) - mean) ** 2;
    variance += (weights[k]! * square) / total;
    meanError += errors[k]! ** 2 * square;
  }
  let varianceError = 0;
  for (let k = 0; k < weights.length; k++)
    varianceError += (errors[k]! * ((at(k) - mean) ** 2 - variance)) ** 2;
  const width = Math.sqrt(variance);
  return {
    mean: { value: mean, sigma: Math.sqrt(meanError) / total },
    width: width > 0 ? { value: width, sigma: Math.sqrt(varianceError) / total / (2 * width) } : null,
  };
}
