import { type CoarseSearch, findCoarseMatch } from './clock-coarse';
import { fitLine, type LineFit, type LinePoint } from './clock-line';
import { fitDelayPeak } from './clock-peak';
import type { Estimate } from './estimate';

/** Clicks of one clock, in ps since its first. */
export interface ClockFile {
  spanPs: number;
  /** Sorted clicks of [from, to), clipped to the file. */
  read(fromPs: number, toPs: number): Promise<Float64Array>;
}

export interface ClockMatch {
  /** main = companion + offset + drift * (companion - referencePs), in ps since the first click of either. */
  offset: Estimate;
  drift: Estimate;
  referencePs: number;
  /** Covariance of offset and drift, in ps. */
  covariance: number;
  /** Significance of the coarse peak and what it had to pass. */
  z: number;
  threshold: number;
  /** Stretches looked at, and those in which the peak stood out. */
  stretches: number;
  found: number;
  /** What the straight line leaves, in ps, and its chi-squared over the degrees of freedom. */
  residualPs: number;
  chi2PerDof: number;
  /** Sigma of the coincidence peak once the clocks are matched. */
  peakSigmaPs: number;
}

const secondPs = 1e12;
/** Clocks that were set and are good first, then those that are neither; each with the stretch correlated. */
export const clockSearches: readonly (CoarseSearch & { spanPs: number })[] = [
  { rangePs: 0.5 * secondPs, spanPs: 2 * secondPs, mostDrift: 2e-5, size: 2 ** 20 },
  { rangePs: 5 * secondPs, spanPs: 5 * secondPs, mostDrift: 1.2e-4, size: 2 ** 21 },
];
/** Clicks a side in the coarse correlation, and in every stretch of the fine one. */
const mostCoarse = 4e6;
const mostFine = 3e5;
/** Change of the rate of a clock over the run that the search for the peak still follows. */
const wander = 1e-8;
const growth = 8;
/** The whole run is gone through again while the last rate smeared its peaks by more than this share of their width. */
const mostSmear = 0.2;
const mostPasses = 4;
/** Stretches of a part of the run, then fewer where they hold too few pairs; the whole run is first cut finer. */
const partStretches = [8, 4];
const wholeStretches = [32, 8, 4];

interface State {
  offset: number;
  drift: number;
  reference: number;
}

/**
 * Matches two free-running clocks: t_main = t_companion + o + u (t_companion - ref).
 * Coarse: `findCoarseMatch` over some seconds in the middle of what overlaps, about each of `guesses` (main less
 * companion, ps since the first clicks). Fine: the delay peak in stretches, a weighted line of its centre against time,
 * over ever longer parts of the run until all of it is used, so that the growing lever never loses the peak. Errors are
 * those of the line, enlarged by sqrt(chi^2/dof) where a line is not all there is.
 * Method of Ho, Lamas-Linares & Kurtsiefer, New J. Phys. 11, 045011 (2009), from memory. A pulsed source gives a comb
 * of peaks and may be matched a whole number of pulse periods off.
 * Null when no peak stands out anywhere: then there is no number to give.
 */
export async function matchClocks(
  main: ClockFile,
  companion: ClockFile,
  guesses: readonly number[],
  searches = clockSearches,
): Promise<ClockMatch | null> {
  for (const search of searches) {
    for (const guess of guesses) {
      const coarse = await findCoarse(main, companion, guess, search);
      if (coarse === null) continue;
      const match = await refine(main, companion, coarse);
      if (match !== null) return match;
    }
  }
  return null;
}

interface Coarse {
  state: State;
  binPs: number;
  spanPs: number;
  ratePerPs: number;
  z: number;
  threshold: number;
}

async function findCoarse(
  main: ClockFile,
  companion: ClockFile,
  guess: number,
  search: CoarseSearch & { spanPs: number },
): Promise<Coarse | null> {
  const { rangePs } = search;
  const low = Math.max(0, guess);
  const high = Math.min(main.spanPs, companion.spanPs + guess);
  if (!(high > low)) return null;
  const middle = (low + high) / 2;
  let spanPs = Math.min(search.spanPs, high - low);
  let mainPs = await main.read(middle - spanPs / 2, middle + spanPs / 2);
  if (mainPs.length > mostCoarse) {
    spanPs *= mostCoarse / mainPs.length;
    mainPs = await main.read(middle - spanPs / 2, middle + spanPs / 2);
  }
  const [fromPs, toPs] = [middle - spanPs / 2, middle + spanPs / 2];
  const companionPs = (await companion.read(fromPs - guess - rangePs, toPs - guess + rangePs)).map(
    (ps) => ps + guess,
  );
  const found = findCoarseMatch({ mainPs, companionPs, fromPs, toPs }, search);
  if (found === null) return null;
  const offset = guess + found.offsetPs;
  return {
    state: { offset, drift: found.drift, reference: middle - offset },
    binPs: found.binPs,
    spanPs,
    ratePerPs: Math.max(mainPs.length / spanPs, companionPs.length / (spanPs + 2 * rangePs)),
    z: found.z,
    threshold: found.threshold,
  };
}

async function refine(main: ClockFile, companion: ClockFile, coarse: Coarse): Promise<ClockMatch | null> {
  let { state } = coarse;
  let reach = 4 * coarse.binPs;
  let spanPs = coarse.spanPs;
  let wholePasses = 0;
  for (;;) {
    const low = Math.max(0, -state.offset, state.reference - spanPs / 2);
    const high = Math.min(companion.spanPs, main.spanPs - state.offset, state.reference + spanPs / 2);
    const wholePs = 2 * Math.max(companion.spanPs, main.spanPs);
    const isWhole = spanPs >= wholePs;
    if (!(high > low)) return null;
    const part = { low, high, reach, rate: coarse.ratePerPs };
    let found: Measured | null = null;
    for (const stretches of isWhole ? wholeStretches : partStretches) {
      found = await measure(main, companion, state, { ...part, stretches });
      if (found !== null) break;
    }
    const line = found === null ? null : fitLine(found.points);
    if (found === null || line === null) return null;
    state = {
      ...state,
      offset: state.offset + line.value,
      drift: state.drift + line.slope,
    };
    if (isWhole) wholePasses += 1;
    const smearPs = Math.abs(line.slope) * found.lengthPs;
    const isSharp = smearPs < mostSmear * found.peakSigmaPs;
    if (isWhole && (isSharp || wholePasses === mostPasses)) return finish(state, line, found, coarse);
    spanPs = Math.min(wholePs, spanPs * growth);
    const scale = Math.sqrt(Math.max(1, line.chi2PerDof));
    const error = Math.sqrt(line.valueVariance) + (Math.sqrt(line.slopeVariance) * spanPs) / 2;
    reach = 5 * scale * error + 12 * found.peakSigmaPs + wander * Math.min(spanPs, companion.spanPs);
  }
}

interface Measured {
  stretches: number;
  /** Of one stretch. */
  lengthPs: number;
  points: LinePoint[];
  peakSigmaPs: number;
}

/** The peak in stretches of [low, high) against the state; null when fewer than three, or fewer than half, show it. */
async function measure(
  main: ClockFile,
  companion: ClockFile,
  { offset, drift, reference }: State,
  part: { low: number; high: number; stretches: number; reach: number; rate: number },
): Promise<Measured | null> {
  const { low, high, stretches, reach, rate } = part;
  const slot = (high - low) / stretches;
  const length = Math.min(slot, mostFine / rate);
  const points: LinePoint[] = [];
  const sigmas: number[] = [];
  for (let k = 0; k < stretches; k += 1) {
    const from = low + k * slot + (slot - length) / 2;
    const mapped = (ps: number): number => ps + offset + drift * (ps - reference);
    const b = (await companion.read(from, from + length)).map(mapped);
    const a = await main.read(mapped(from) - reach, mapped(from + length) + reach);
    const peak = fitDelayPeak(a, b, reach);
    if (peak === null) continue;
    points.push({ x: from + length / 2 - reference, y: peak.centre, sigma: peak.centreError });
    sigmas.push(peak.sigma);
  }
  if (points.length < Math.max(3, stretches / 2)) return null;
  sigmas.sort((x, y) => x - y);
  return { stretches, lengthPs: length, points, peakSigmaPs: sigmas[sigmas.length >> 1]! };
}

function finish(state: State, line: LineFit, found: Measured, coarse: Coarse): ClockMatch {
  const scale = Math.max(1, line.chi2PerDof);
  return {
    offset: { value: state.offset, sigma: Math.sqrt(scale * line.valueVariance) },
    drift: { value: state.drift, sigma: Math.sqrt(scale * line.slopeVariance) },
    referencePs: state.reference,
    covariance: scale * line.covariance,
    z: coarse.z,
    threshold: coarse.threshold,
    stretches: found.stretches,
    found: found.points.length,
    residualPs: line.residual,
    chi2PerDof: line.chi2PerDof,
    peakSigmaPs: found.peakSigmaPs,
  };
}

/**
 * The match about the zeros of both clocks: t_main = t_companion (1 + drift) + offset, first clicks at `mainFirstPs` and
 * `companionFirstPs`. The error of the offset is that of the line carried to the companion's zero.
 */
export function offsetAtZero(match: ClockMatch, mainFirstPs: number, companionFirstPs: number): Estimate {
  const lever = match.referencePs + companionFirstPs;
  const value = mainFirstPs - companionFirstPs + match.offset.value - match.drift.value * lever;
  const variance = match.offset.sigma ** 2 + (lever * match.drift.sigma) ** 2 - 2 * lever * match.covariance;
  return { value, sigma: Math.sqrt(Math.max(0, variance)) };
}
