import { inverse, Matrix } from 'ml-matrix';
import { normalCdf, normalPdf } from './special';

/** Equal bins from `lo`, each `step` wide, in the unit the answer is wanted in. */
export interface BinnedCounts {
  lo: number;
  step: number;
  counts: ArrayLike<number>;
}

export interface PeakFit {
  /** Counts in the whole peak, its centre and sigma, and the flat base in counts per bin. */
  area: number;
  centre: number;
  sigma: number;
  base: number;
  /** Standard errors from the inverse Fisher information, and the covariance of centre and sigma. */
  areaError: number;
  centreError: number;
  sigmaError: number;
  baseError: number;
  centreSigmaCov: number;
}

export interface PeakStart {
  area: number;
  centre: number;
  sigma: number;
  base: number;
}

const MAX_STEPS = 200;

/**
 * Gaussian on a constant base by Poisson maximum likelihood, L = sum(lambda - y ln lambda), with the Gaussian integrated
 * over each bin. Fisher scoring on (ln area, centre, ln sigma, ln base) with step halving. Errors are those of the
 * inverse Fisher information at the maximum; for many pairs on a base b per unit delay the centre's is
 * sigma sqrt(1/N + 4 sqrt(pi) sigma b / N^2) (`centreErrorLaw`). Cash, Astrophys. J. 228, 939 (1979), from memory, for
 * the Poisson likelihood. Null when it does not converge, when the peak is narrower than a fifth of a bin or wider than
 * the range: then there is no fit to quote.
 */
export function fitPeak(data: BinnedCounts, start: PeakStart): PeakFit | null {
  const span = data.counts.length * data.step;
  let p = [
    Math.log(Math.max(start.area, 1)),
    start.centre,
    Math.log(start.sigma),
    Math.log(Math.max(start.base, 1e-6)),
  ];
  let loss = lossAt(data, p);
  let damping = 0;
  for (let n = 0; n < MAX_STEPS; n++) {
    const { gradient, fisher } = scoreAt(data, p);
    const step = solveStep(fisher, gradient, damping);
    if (step === null) return null;
    const size = stepSize(step, p);
    let scale = size > 2 ? 2 / size : 1;
    let next = p;
    let nextLoss = Number.POSITIVE_INFINITY;
    for (
      let halving = 0;
      halving < 30 && !(nextLoss <= loss + 1e-10 * Math.abs(loss));
      halving++, scale /= 2
    ) {
      next = p.map((value, i) => value - scale * step[i]!);
      // The base may vanish; below this it has no effect and the logarithm must not run away.
      next[3] = Math.max(next[3]!, -30);
      nextLoss = lossAt(data, next);
    }
    if (!(nextLoss <= loss + 1e-10 * Math.abs(loss))) {
      damping = damping === 0 ? 1e-3 : damping * 10;
      if (damping > 1e6) return null;
      continue;
    }
    p = next;
    loss = nextLoss;
    if (size < 1e-7) return finishFit(data, p, span);
  }
  return null;
}

/**
 * Standard error of the centre of a Gaussian peak of `pairs` counts and width `sigma` on a base of `basePerUnit`
 * accidentals per unit delay: sigma sqrt(1/N + 4 sqrt(pi) sigma b / N^2). Derived from the Fisher information of a
 * Gaussian on a flat base.
 */
export function centreErrorLaw(sigma: number, pairs: number, basePerUnit: number): number {
  return sigma * Math.sqrt(1 / pairs + (4 * Math.sqrt(Math.PI) * sigma * basePerUnit) / pairs ** 2);
}

/** Model counts in bin m. */
export function peakModel(fit: PeakStart, lo: number, step: number, bin: number): number {
  const left = (lo + bin * step - fit.centre) / fit.sigma;
  return fit.base + fit.area * gaussBetween(left, left + step / fit.sigma);
}

/** Probability between two standard scores, from the tail in which no digits are lost. */
function gaussBetween(left: number, right: number): number {
  return left > 0 ? normalCdf(-left) - normalCdf(-right) : normalCdf(right) - normalCdf(left);
}

function lossAt(data: BinnedCounts, p: number[]): number {
  const model = { area: Math.exp(p[0]!), centre: p[1]!, sigma: Math.exp(p[2]!), base: Math.exp(p[3]!) };
  let loss = 0;
  for (let m = 0; m < data.counts.length; m++) {
    const lambda = peakModel(model, data.lo, data.step, m);
    const y = data.counts[m]!;
    loss += lambda - (y > 0 ? y * Math.log(lambda) : 0);
  }
  return loss;
}

function scoreAt(data: BinnedCounts, p: number[]): { gradient: number[]; fisher: number[][] } {
  const [area, centre, sigma, base] = [Math.exp(p[0]!), p[1]!, Math.exp(p[2]!), Math.exp(p[3]!)];
  const gradient = [0, 0, 0, 0];
  const fisher = [0, 1, 2, 3].map(() => [0, 0, 0, 0]);
  const slope = [0, 0, 0, 0];
  for (let m = 0; m < data.counts.length; m++) {
    const left = (data.lo + m * data.step - centre) / sigma;
    const right = left + data.step / sigma;
    const share = area * gaussBetween(left, right);
    const lambda = base + share;
    const pdfLeft = normalPdf(left);
    const pdfRight = normalPdf(right);
    slope[0] = share;
    slope[1] = (area * (pdfLeft - pdfRight)) / sigma;
    slope[2] = area * (left * pdfLeft - right * pdfRight);
    slope[3] = base;
    const pull = 1 - data.counts[m]! / lambda;
    for (let i = 0; i < 4; i++) {
      gradient[i]! += pull * slope[i]!;
      for (let j = 0; j <= i; j++) fisher[i]![j]! += (slope[i]! * slope[j]!) / lambda;
    }
  }
  for (let i = 0; i < 4; i++) for (let j = i + 1; j < 4; j++) fisher[i]![j] = fisher[j]![i]!;
  return { gradient, fisher };
}

/** Relative size of a step; the centre's is measured in sigmas. */
function stepSize(step: number[], p: number[]): number {
  return Math.max(
    Math.abs(step[0]!),
    Math.abs(step[1]!) / Math.exp(p[2]!),
    Math.abs(step[2]!),
    baseStep(step, p),
  );
}

function baseStep(step: number[], p: number[]): number {
  return p[3]! <= -20 ? 0 : Math.abs(step[3]!);
}

function solveStep(fisher: number[][], gradient: number[], damping: number): number[] | null {
  const inverted = invert(fisher, 1e-12 + damping);
  return inverted === null
    ? null
    : inverted.map((row) => row.reduce((sum, v, j) => sum + v * gradient[j]!, 0));
}

/** Inverse after scaling to unit diagonal, which keeps very different units apart. */
function invert(fisher: number[][], ridge: number): number[][] | null {
  const scale = fisher.map((row, i) => Math.sqrt(Math.max(row[i]!, 1e-30)));
  const scaled = fisher.map((row, i) =>
    row.map((v, j) => v / (scale[i]! * scale[j]!) + (i === j ? ridge : 0)),
  );
  const inverted = inverse(new Matrix(scaled)).to2DArray();
  if (!inverted.flat().every(Number.isFinite)) return null;
  return inverted.map((row, i) => row.map((v, j) => v / (scale[i]! * scale[j]!)));
}

function finishFit(data: BinnedCounts, p: number[], span: number): PeakFit | null {
  const [area, centre, sigma, base] = [Math.exp(p[0]!), p[1]!, Math.exp(p[2]!), Math.exp(p[3]!)];
  const inside = centre > data.lo && centre < data.lo + span;
  if (!(inside && sigma > data.step / 5 && sigma < span)) return null;
  const covariance = invert(scoreAt(data, p).fisher, 0);
  if (covariance === null) return null;
  const error = (i: number): number => Math.sqrt(Math.max(0, covariance[i]![i]!));
  return {
    area,
    centre,
    sigma,
    base,
    areaError: area * error(0),
    centreError: error(1),
    sigmaError: sigma * error(2),
    // Without base counts the logarithm's error has no meaning; one count in the range is the scale of what was not seen.
    baseError: base < 1e-8 ? 1 / data.counts.length : base * error(3),
    centreSigmaCov: sigma * covariance[1]![2]!,
  };
}
