import { countVariance, type Estimate } from './estimate';
import { erf, normalPdf } from './special';

/** FWHM of a Gaussian over its sigma. */
export const FWHM_PER_SIGMA = 2 * Math.sqrt(2 * Math.LN2);

/** Counts per second and its Poisson error: R = N/T, SE = sqrt(N)/T, that of one count when there is none. */
export function countRate(counts: number, seconds: number): Estimate {
  return { value: counts / seconds, sigma: Math.sqrt(countVariance(counts)) / seconds };
}

/**
 * Fano factor Var/mean of counts in equal spans: 1 for a steady Poisson source, more under drift or afterpulsing. Its
 * error for Poisson counts is sqrt(2/(n-1)). Null for fewer than two spans or no counts.
 */
export function fanoFactor(counts: ArrayLike<number>): Estimate | null {
  const n = counts.length;
  let mean = 0;
  for (let i = 0; i < n; i++) mean += counts[i]! / n;
  if (n < 2 || !(mean > 0)) return null;
  let variance = 0;
  for (let i = 0; i < n; i++) variance += (counts[i]! - mean) ** 2 / (n - 1);
  return { value: variance / mean, sigma: Math.sqrt(2 / (n - 1)) };
}

export interface G2Request {
  /** Pairs in the bin of an all-pairs histogram. */
  pairs: number;
  countsA: number;
  countsB: number;
  binS: number;
  /** Centre of the bin and length of the record: tags near the ends have fewer partners, T_eff = T - |tau|. */
  tauS: number;
  spanS: number;
}

/**
 * g2(tau) = H/(R_A R_B b (T - |tau|)); SE = g2 sqrt(1/H + 1/N_A + 1/N_B). Only an all-pairs histogram may be normalised
 * like this. Mandel & Wolf, Optical Coherence and Quantum Optics (1995), from memory. Null without tags.
 */
export function g2(request: G2Request): Estimate | null {
  const { pairs, countsA, countsB, binS, tauS, spanS } = request;
  const overlapS = spanS - Math.abs(tauS);
  const expected = (countsA / spanS) * (countsB / spanS) * binS * overlapS;
  if (!(expected > 0) || !(overlapS > 0)) return null;
  const value = pairs / expected;
  // An empty bin has the error of one count, not none.
  const sigma = pairs > 0 ? value * Math.sqrt(1 / pairs + 1 / countsA + 1 / countsB) : 1 / expected;
  return { value, sigma };
}

/** Unheralded g2(0) of M equal thermal modes, 1 + 1/M (Mandel & Wolf, as above). */
export function thermalG2(modes: number): number {
  return 1 + 1 / modes;
}

/** Sigma of the coincidence peak from independent jitters given as FWHM: they add in quadrature. */
export function peakSigmaFromFwhm(fwhms: readonly number[]): number {
  return Math.hypot(...fwhms) / FWHM_PER_SIGMA;
}

/**
 * Fraction of a Gaussian peak inside a window of full width w whose centre is off by d:
 * f = [erf((w/2-d)/(sqrt2 s)) + erf((w/2+d)/(sqrt2 s))]/2. Detectors with exponential tails keep less.
 */
export function windowFraction(width: number, sigma: number, offset: number): number {
  const scale = Math.SQRT2 * sigma;
  return (erf((width / 2 - offset) / scale) + erf((width / 2 + offset) / scale)) / 2;
}

/** The same with its error from a fitted sigma and centre, delta method with their covariance. */
export function windowFractionOfFit(
  width: number,
  offset: number,
  fit: { sigma: number; sigmaError: number; centreError: number; centreSigmaCov: number },
): Estimate {
  const { sigma } = fit;
  const right = (width / 2 - offset) / sigma;
  const left = (-width / 2 - offset) / sigma;
  // f = Phi(right) - Phi(left); `offset` is window centre minus peak taken with either sign, f is even in it.
  const perOffset = (normalPdf(left) - normalPdf(right)) / sigma;
  const perSigma = (left * normalPdf(left) - right * normalPdf(right)) / sigma;
  const variance =
    perOffset ** 2 * fit.centreError ** 2 +
    perSigma ** 2 * fit.sigmaError ** 2 +
    2 * perOffset * perSigma * fit.centreSigmaCov;
  return { value: windowFraction(width, sigma, offset), sigma: Math.sqrt(Math.max(0, variance)) };
}

/**
 * Half-window over sigma that gives the best S/sqrt(B) when accidentals dominate: root of
 * d/dh [erf(h/sqrt2)/sqrt(h)] = 0, 2 h phi(h) = erf(h/sqrt2)/2, by bisection. The full window is 2.80 sigma and keeps
 * 83.8 % of the peak.
 */
export function bestHalfWindow(): number {
  const slope = (h: number): number => 2 * h * normalPdf(h) - erf(h / Math.SQRT2) / 2;
  let [low, high] = [1, 2];
  for (let n = 0; n < 60; n++) {
    const middle = (low + high) / 2;
    if (slope(middle) > 0) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}
