import type { Arm } from '../../shared/contracts/detector';
import type { DialValues } from '../../shared/contracts/dial';
import type { TagSpec, TagTally } from '../../shared/contracts/tally';
import { type FoundPeak, findPeak } from '../../shared/physics/find-peak';
import { type BinnedCounts, fitPeak, type PeakFit } from '../../shared/physics/fit-peak';
import { ticksToPs } from '../../shared/units/ticks';
import { autoDial, numberDial } from './dials';
import type { Chosen, StudyInput } from './study';
import { tickFsOf } from './tag-input';
import { assertArmsApart, detectorArm, histogramAround, MAX_HISTOGRAM_BINS } from './tag-spec';

export interface ArmPair {
  a: Arm;
  b: Arm;
}

/** The search looks this much farther to either side than the histogram dial says. */
const SEARCH_REACH = 5;
/** Fine enough for the narrowest coincidence peaks; coarser ones are found by joining bins. */
const SEARCH_BIN_PS = 20;
/** Full window in sigmas of the fitted peak: keeps 95.45 % of a Gaussian one. */
export const AUTO_WINDOW_SIGMAS = 4;
/** When no peak stands out: a window as wide as two good avalanche detectors would need. */
const BLIND_WINDOW_PS = 2000;

export function describeArms(arms: ArmPair): string {
  return `${arms.a} and ${arms.b}`;
}

/** Histogram only, wide and fine; null when delay and window are both set and nothing has to be searched. */
export function buildSearchSpec(input: StudyInput, arms: ArmPair, dials: DialValues): TagSpec | null {
  const delay = autoDial(dials, 'delay');
  if (delay !== null && autoDial(dials, 'window') !== null) return null;
  const tickFs = tickFsOf(input);
  const a = detectorArm(input.detector, arms.a, tickFs);
  const b = detectorArm(input.detector, arms.b, tickFs);
  assertArmsApart(a, b);
  const rangePs = numberDial(dials, 'histogram.range') * 1000;
  const reachPs = delay === null ? rangePs * SEARCH_REACH : rangePs;
  const binPs = Math.max(SEARCH_BIN_PS, (2 * reachPs) / MAX_HISTOGRAM_BINS);
  const centre = ((delay ?? 0) * 1000) / tickFs;
  return {
    kind: 'tags',
    tickFs,
    a,
    b,
    histogram: histogramAround(centre, reachPs, binPs, tickFs),
    window: null,
  };
}

/**
 * Delay, window and bin (ps) from a searched histogram; what a person has set is kept. Null when no peak stands out
 * against the flat base. `sigma` is that of the fitted peak; `peak.z` how far it stands out.
 */
export function choosePeak(tally: TagTally, dials: DialValues): Chosen | null {
  const data = histogramPs(tally);
  const found = findPeak(data);
  if (found === null) return null;
  const fit = fitAround(data, found);
  const sigma = fit?.sigma ?? found.width / 4;
  const delay = autoDial(dials, 'delay') ?? fit?.centre ?? found.centre;
  const window = autoDial(dials, 'window') ?? AUTO_WINDOW_SIGMAS * sigma;
  return { ...withBin(delay, window, sigma, dials), 'peak.z': found.z };
}

/** Where nothing stands out: delay 0 and a window of 2 ns, unless set. The study then fails its check "peak-found". */
export function blindChoice(dials: DialValues): Chosen {
  const window = autoDial(dials, 'window') ?? BLIND_WINDOW_PS;
  return withBin(autoDial(dials, 'delay') ?? 0, window, window / AUTO_WINDOW_SIGMAS, dials);
}

function withBin(delay: number, window: number, sigma: number, dials: DialValues): Chosen {
  return { delay, window, sigma, 'histogram.bin': autoDial(dials, 'histogram.bin') ?? sigma / 3 };
}

/**
 * Delay histogram with edges in ps. A tick stands for the times that round to it, so bin m of whole ticks
 * [lo, lo + b) covers [lo - 1/2, lo + b - 1/2).
 */
export function histogramPs(tally: Pick<TagTally, 'histogram' | 'tickFs'>): BinnedCounts {
  const { loTick, binTick, counts } = tally.histogram;
  return {
    lo: ticksToPs(loTick - 0.5, tally.tickFs),
    step: ticksToPs(binTick, tally.tickFs),
    counts,
  };
}

/** Gaussian on a constant, fitted to +- 6 widths of the stretch that stood out, in at most about 800 joined bins; the base is per bin of `data`. */
export function fitAround(data: BinnedCounts, found: FoundPeak): PeakFit | null {
  const first = Math.max(0, Math.floor((found.centre - 6 * found.width - data.lo) / data.step));
  const last = Math.min(
    data.counts.length,
    Math.ceil((found.centre + 6 * found.width - data.lo) / data.step),
  );
  const join = Math.max(1, Math.floor((last - first) / 400));
  const counts = new Float64Array(Math.floor((last - first) / join));
  for (let m = 0; m < counts.length * join; m++) counts[Math.floor(m / join)]! += data.counts[first + m]!;
  const fit = fitPeak(
    { lo: data.lo + first * data.step, step: data.step * join, counts },
    { area: found.excess, centre: found.centre, sigma: found.width / 3, base: found.basePerBin * join },
  );
  return fit && { ...fit, base: fit.base / join, baseError: fit.baseError / join };
}
