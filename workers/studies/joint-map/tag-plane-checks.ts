import type { Check } from '../../../shared/contracts/output';
import { spreadOf } from '../../../shared/physics/bootstrap';
import type { PairFit } from '../../../shared/physics/fit-pair';
import { FIT_PARAMETERS, type ShapeFit } from '../../../shared/physics/fit-shape';
import { formatFigure } from '../format-figure';
import { checkAccidentalsAgree, checkPairsEnough, checkPeakFound, checkWindowCut } from '../peak-checks';
import { checkDrift, checkLiveTime, checkMapped, checkOrder, checkPixels } from '../run-checks';
import type { TagCount } from '../tag-count';
import { checkBlocks } from './plane-checks';
import { type ArmScales, goodFit, type TagAxis } from './tag-axis';

export interface TagChecksRequest {
  count: TagCount;
  x: TagAxis;
  y: TagAxis;
  scales: ArmScales;
  plane: 'near' | 'far';
}

/** Fewer net pairs than the first make the asymptotic errors doubtful; from the second on they are steady. */
const LEAST_PAIRS = 200;
const GOOD_PAIRS = 1000;

export function checkTagPlane(request: TagChecksRequest): Check[] {
  const { count } = request;
  const arms = { a: 'signal', b: 'idler' } as const;
  return [
    checkPeakFound(count),
    checkPairsEnough(count, LEAST_PAIRS, GOOD_PAIRS),
    checkWindowCut(count),
    checkAccidentalsAgree(count),
    checkBlocks(count.tally.slices, 'slices of time'),
    checkFit(request),
    checkTruncation(request),
    checkSign(request),
    checkDiscarded(request),
    checkResolution(request),
    checkWidthDrift(request),
    checkExcess(request),
    checkDrift(count, arms),
    checkPixels([
      { arm: count.tally.a, name: 'signal' },
      { arm: count.tally.b, name: 'idler' },
    ]),
    checkMapped(count),
    checkOrder(count),
    checkLiveTime(count),
  ];
}

const axesOf = ({ x, y }: TagChecksRequest): { name: string; axis: TagAxis }[] => [
  { name: 'x', axis: x },
  { name: 'y', axis: y },
];

const namesOf = (axes: readonly { name: string }[]): string => axes.map(({ name }) => name).join(' and ');

/** Axes on which the fit may be believed, with it. */
const goodFits = (request: TagChecksRequest): { name: string; axis: TagAxis; fit: PairFit }[] =>
  axesOf(request).flatMap(({ name, axis }) => {
    const fit = goodFit(axis);
    return fit === null ? [] : [{ name, axis, fit }];
  });

/**
 * The fit stopped at the least width it can tell, and not because noise drove it there: the moments are clearly
 * correlated, so the pairs are correlated more finely than the pixels see.
 */
const belowPixels = (axis: TagAxis): boolean =>
  axis.fit?.fit.atFloor === true && Math.abs(momentCorrelationZ(axis) ?? 0) >= 3;

function checkFit(request: TagChecksRequest): Check {
  const id = 'fit-good';
  const unfitted = axesOf(request).filter(({ axis }) => goodFit(axis) === null && !belowPixels(axis));
  if (unfitted.length > 0) {
    const sentence = `No Gaussian could be fitted to the joint map of ${namesOf(unfitted)}, so its numbers with accidentals subtracted are left out; measure longer or look at the map.`;
    return { id, status: 'fail', figure: null, unit: '', sentence };
  }
  const narrow = axesOf(request).filter(({ axis }) => belowPixels(axis));
  if (narrow.length > 0) {
    const sentence = `The pairs are correlated along ${namesOf(narrow)} more narrowly than the pixels are wide, so no fitted width is given there; magnify more.`;
    return { id, status: 'caution', figure: null, unit: '', sentence };
  }
  let worst = 0;
  let deviation = 0;
  for (const { fit } of goodFits(request)) {
    const { chi2, ndf } = fit;
    if (ndf < 1) continue;
    worst = Math.max(worst, chi2 / ndf);
    deviation = Math.max(deviation, (chi2 - ndf) / Math.sqrt(2 * ndf));
  }
  const base = { id, figure: worst, unit: 'chi^2/ndf' };
  const found = `The larger chi^2 per degree of freedom of the two joint-map fits is ${worst.toFixed(2)}`;
  if (deviation <= 5 || worst < 1.2) return { ...base, status: 'pass', sentence: `${found}.` };
  const sentence = `${found}, ${deviation.toFixed(0)} standard deviations too large: the map is not one Gaussian on its accidentals. Compare the fitted widths with the moments.`;
  return { ...base, status: 'caution', sentence };
}

function checkTruncation(request: TagChecksRequest): Check {
  const outside = goodFits(request).map(({ fit }) => 100 * fit.outside);
  if (outside.length === 0) {
    const sentence = 'Without a fitted Gaussian it is not known how many pairs lie outside the arrays.';
    return { id: 'map-truncated', status: 'caution', figure: null, unit: '%', sentence };
  }
  const percent = Math.max(...outside);
  const base = { id: 'map-truncated', figure: percent, unit: '%' };
  const part = `${percent.toFixed(1)} % of the fitted pairs lie outside the arrays`;
  if (percent <= 5) return { ...base, status: 'pass', sentence: `${part}.` };
  const status = percent <= 40 ? 'caution' : 'fail';
  const sentence = `${part}: moments come out too narrow, the fit extrapolates. Use a larger array or a smaller magnification, or trust the fitted widths only.`;
  return { ...base, status, sentence };
}

/** Positions of pairs should agree, momenta should be opposite. */
function checkSign(request: TagChecksRequest): Check {
  const near = request.plane === 'near';
  const wanted = near ? 1 : -1;
  const id = 'correlation-sign';
  const wrong: string[] = [];
  let weakest = Number.POSITIVE_INFINITY;
  for (const { name, axis } of axesOf(request)) {
    const z = correlationZ(axis);
    if (z === null) {
      const sentence = `Without a fit it is not known whether the two arms are correlated along ${name}.`;
      return { id, status: 'caution', figure: null, unit: 'sigma', sentence };
    }
    weakest = Math.min(weakest, wanted * z);
    if (wanted * z < -3) wrong.push(name);
  }
  const base = { id, figure: weakest, unit: 'sigma' };
  if (wrong.length > 0) {
    const axes = wrong.join(' and ');
    const sentence = near
      ? `The two arms run opposite ways along ${axes} in the near field, where pairs leave from one place; flip ${axes} of one arm in the detector map.`
      : `The two arms run the same way along ${axes} in the far field, where pairs leave with opposite momenta; flip ${axes} of one arm in the detector map.`;
    return { ...base, status: 'fail', sentence };
  }
  if (weakest < 3) {
    const sentence = `The correlation of the two arms is not clear of zero (${formatFigure(weakest)} standard errors).`;
    return { ...base, status: 'caution', sentence };
  }
  const sentence = near
    ? 'Positions of the two arms are correlated, as they should be in the near field.'
    : 'Momenta of the two arms are anti-correlated, as they should be in the far field.';
  return { ...base, status: 'pass', sentence };
}

/**
 * Standard errors of the correlation above zero: of the fitted covariance, or of the moments where the ridge is too
 * narrow to be fitted. Null where neither is known.
 */
function correlationZ(axis: TagAxis): number | null {
  const fit = goodFit(axis);
  if (fit !== null) {
    const sigma = sigmaOf(fit.influence, (m) => m(4));
    return sigma > 0 ? fit.blurred.c / sigma : null;
  }
  return belowPixels(axis) ? momentCorrelationZ(axis) : null;
}

/** Standard errors of the moments' correlation above zero; null where its error is not known. */
function momentCorrelationZ({ result }: TagAxis): number | null {
  const { correlation } = result.moment;
  if (correlation === null) return null;
  const { sigma } = spreadOf(correlation.resampled);
  // Pairs that always share a pixel have a correlation of one in every resample.
  return Number.isFinite(sigma) ? correlation.value / Math.max(sigma, 1e-12) : null;
}

function checkDiscarded(request: TagChecksRequest): Check {
  const percent = Math.max(...axesOf(request).map(({ axis }) => 100 * axis.rawColumns.discarded));
  const base = { id: 'columns-kept', figure: percent, unit: '%' };
  const part = `${percent.toFixed(1)} % of the raw counts lie in columns of fewer than 5 counts and do not enter the raw conditional variance`;
  return percent <= 2
    ? { ...base, status: 'pass', sentence: `${part}.` }
    : { ...base, status: 'caution', sentence: `${part}: measure longer.` };
}

/** Width of the narrow coordinate against the blur of two pixels. */
function checkResolution(request: TagChecksRequest): Check {
  const { plane } = request;
  const ratios = goodFits(request).map(({ fit }) => {
    const { v1, v2, c } = fit.blurred;
    return (v1 + v2 - 2 * Math.abs(c)) / (1 / 6);
  });
  const id = 'pixels-fine';
  const narrowAxes = axesOf(request).filter(({ axis }) => belowPixels(axis));
  if (narrowAxes.length > 0) {
    const sentence = `The pairs are narrower than the pixels along ${namesOf(narrowAxes)}; magnify more to resolve them.`;
    return { id, status: 'caution', figure: null, unit: '1', sentence };
  }
  if (ratios.length === 0) {
    const sentence = 'Without a fit it is not known whether the pixels resolve the pairs.';
    return { id, status: 'caution', figure: null, unit: '1', sentence };
  }
  const least = Math.min(...ratios);
  const base = { id, figure: least, unit: '1' };
  const narrow = plane === 'near' ? 'difference' : 'sum';
  if (least >= 1.5) {
    const sentence = `The ${narrow} coordinate varies ${formatFigure(least)} times as much as its pixels alone would make it.`;
    return { ...base, status: 'pass', sentence };
  }
  const sentence = `The ${narrow} coordinate is hardly wider than its pixels: take its width as an upper limit, and magnify more to resolve it.`;
  return { ...base, status: 'caution', sentence };
}

/** Narrow variance of the first against the second half of the slices. */
function checkWidthDrift(request: TagChecksRequest): Check {
  const id = 'width-drift';
  const fits = goodFits(request);
  if (fits.length === 0) {
    const sentence = 'Without a fit it is not known whether the widths drift.';
    return { id, status: 'caution', figure: null, unit: 'sigma', sentence };
  }
  let worst = 0;
  for (const { fit } of fits) {
    const move = narrowMoves(fit, request.plane);
    const half = move.length / 2;
    const sigma = scatterOf(move);
    const halves = move.reduce((sum, v, s) => sum + (s < half ? v : -v), 0);
    if (sigma > 0) worst = Math.max(worst, Math.abs(halves) / sigma);
  }
  const base = { id, figure: worst, unit: 'sigma' };
  if (worst <= 3.5) {
    const sentence = 'The narrow widths of both halves of the run agree.';
    return { ...base, status: 'pass', sentence };
  }
  const sentence = `The narrow widths of the first and second half differ by ${worst.toFixed(1)} standard errors: focus or pointing drifted. Cut the run.`;
  return { ...base, status: worst <= 6 ? 'caution' : 'fail', sentence };
}

/** Block scatter of the narrow variance against what counting alone would give. */
function checkExcess(request: TagChecksRequest): Check {
  const id = 'excess-noise';
  const fits = goodFits(request);
  if (fits.length === 0) {
    const sentence = 'Without a fit it is not known how the widths of single slices scatter.';
    return { id, status: 'caution', figure: null, unit: '1', sentence };
  }
  let worst = 0;
  for (const { fit } of fits) {
    const expected = fisherOf(fit.fit, request.plane === 'near' ? -1 : 1);
    const ratio = scatterOf(narrowMoves(fit, request.plane)) / expected;
    if (Number.isFinite(ratio)) worst = Math.max(worst, ratio);
  }
  const base = { id, figure: worst, unit: '1' };
  if (worst <= 1.5) {
    const sentence = 'Slices of time scatter as counting alone makes them.';
    return { ...base, status: 'pass', sentence };
  }
  const sentence = `The narrow width scatters between slices of time ${worst.toFixed(1)} times as much as counting alone explains (drift or afterpulsing); the errors given are from that scatter.`;
  return { ...base, status: 'caution', sentence };
}

/** How each slice moves Var(x1 -+ x2), pixel^2. */
function narrowMoves({ influence }: PairFit, plane: 'near' | 'far'): Float64Array {
  const sign = plane === 'near' ? -2 : 2;
  return Float64Array.from({ length: influence.length / FIT_PARAMETERS }, (_, s) => {
    const at = (p: number): number => influence[s * FIT_PARAMETERS + p] as number;
    return at(3) + at(5) + sign * at(4);
  });
}

function sigmaOf(influence: Float64Array, pick: (move: (p: number) => number) => number): number {
  const blocks = influence.length / FIT_PARAMETERS;
  return scatterOf(
    Float64Array.from({ length: blocks }, (_, s) => pick((p) => influence[s * FIT_PARAMETERS + p] as number)),
  );
}

/** Standard error of a sum over blocks, from their scatter. */
function scatterOf(moves: Float64Array): number {
  const mean = moves.reduce((sum, v) => sum + v, 0) / Math.max(moves.length, 1);
  return Math.sqrt(moves.reduce((sum, v) => sum + (v - mean) ** 2, 0));
}

/** Standard error of V1 + V2 + 2 sign C from the inverse Fisher matrix. */
function fisherOf(fit: ShapeFit, sign: number): number {
  const gradient = new Map([
    [3, 1],
    [4, 2 * sign],
    [5, 1],
  ]);
  const k = fit.free.length;
  let variance = 0;
  fit.free.forEach((p, a) => {
    fit.free.forEach((q, b) => {
      variance += (gradient.get(p) ?? 0) * (gradient.get(q) ?? 0) * (fit.covariance[a * k + b] as number);
    });
  });
  return Math.sqrt(variance);
}
