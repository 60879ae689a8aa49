import type { PairTally, TagTally } from '../../shared/contracts/tally';
import {
  accidentalsFromSingles,
  accidentalsFromWindows,
  netCoincidences,
} from '../../shared/physics/coincidence';
import type { Estimate } from '../../shared/physics/estimate';
import { type FoundPeak, findPeak } from '../../shared/physics/find-peak';
import type { BinnedCounts, PeakFit } from '../../shared/physics/fit-peak';
import { windowFractionOfFit } from '../../shared/physics/timing';
import { ticksToPs } from '../../shared/units/ticks';
import { fitAround, histogramPs } from './peak-search';
import { type SliceTimes, sliceTimes } from './slice-times';
import { effectiveWidthPs } from './tag-spec';

/** Everything the tag studies draw their numbers and checks from, once per look. Times in ps unless the name says s. */
export interface TagCount {
  tally: TagTally;
  /** Live time. */
  seconds: number;
  times: SliceTimes;
  countsA: number;
  countsB: number;
  /** Full width and centre of the window as counted, in whole ticks. */
  windowPs: number;
  windowCentrePs: number;
  inWindow: number;
  shiftedCounts: number;
  shifts: number;
  histogram: BinnedCounts;
  found: FoundPeak | null;
  fit: PeakFit | null;
  /** Share of the fitted peak inside the window. */
  fraction: Estimate | null;
  sideband: Sideband | null;
  /** Counts in the whole run, by the three ways. */
  accidentals: { product: Estimate; shifted: Estimate; sideband: Estimate | null };
  /** With the shifted-window accidentals, which see drift as the pairs do. */
  net: Estimate;
}

export interface Sideband {
  counts: number;
  widthPs: number;
  /** First and past-the-last bin left out around the peak. */
  skipFrom: number;
  skipTo: number;
}

export function countTags(tally: TagTally): TagCount {
  const times = sliceTimes(tally);
  const seconds = times.liveS;
  const countsA = sum(tally.a.singles);
  const countsB = sum(tally.b.singles);
  const windowPs = effectiveWidthPs(tally);
  const { loTick, hiTick, shiftsTick } = tally.window;
  const windowCentrePs = ticksToPs((loTick + hiTick) / 2, tally.tickFs);
  const inWindow = sum(tally.prompt.pairs);
  const shiftedCounts = sum(tally.shifted.pairs);
  const shifts = shiftsTick.length;
  const histogram = histogramPs(tally);
  const found = findPeak(histogram);
  const fit = found === null ? null : fitAround(histogram, found);
  const shifted = accidentalsFromWindows(shiftedCounts, Math.max(1, shifts));
  const net = netCoincidences(inWindow, shifted);
  const sideband = sidebandOf(histogram, windowCentrePs, windowPs, fit);
  return {
    tally,
    seconds,
    times,
    countsA,
    countsB,
    windowPs,
    windowCentrePs,
    inWindow,
    shiftedCounts,
    shifts,
    histogram,
    found,
    fit,
    fraction: fit === null ? null : windowFractionOfFit(windowPs, windowCentrePs - fit.centre, fit),
    sideband,
    accidentals: {
      product: accidentalsFromSingles(countsA, countsB, windowPs * 1e-12, seconds, net.value),
      shifted,
      sideband: sideband && accidentalsFromWindows(sideband.counts, sideband.widthPs / windowPs),
    },
    net,
  };
}

/** Image of the paired tags of arm B, or A, over all slices. */
export function pairedImage(pairs: PairTally, arm: 'A' | 'B', pixels: number): Float64Array {
  const perSlice = arm === 'A' ? pairs.imageA : pairs.imageB;
  const image = new Float64Array(pixels);
  for (let k = 0; k < perSlice.length; k++) image[k % pixels]! += perSlice[k]!;
  return image;
}

export function sum(values: Float64Array): number {
  let total = 0;
  for (const value of values) total += value;
  return total;
}

/** Bins farther from the peak than six sigma of the fit and than the window; null when less than one window is left. */
function sidebandOf(
  data: BinnedCounts,
  centrePs: number,
  windowPs: number,
  fit: PeakFit | null,
): Sideband | null {
  const peak = fit ?? { centre: centrePs, sigma: windowPs / 4 };
  const from = Math.min(peak.centre - 6 * peak.sigma, centrePs - windowPs);
  const to = Math.max(peak.centre + 6 * peak.sigma, centrePs + windowPs);
  const bins = data.counts.length;
  const skipFrom = Math.min(bins, Math.max(0, Math.floor((from - data.lo) / data.step)));
  const skipTo = Math.min(bins, Math.max(skipFrom, Math.ceil((to - data.lo) / data.step)));
  const widthPs = (bins - (skipTo - skipFrom)) * data.step;
  if (!(widthPs >= windowPs)) return null;
  let counts = 0;
  for (let m = 0; m < bins; m++) if (m < skipFrom || m >= skipTo) counts += data.counts[m]!;
  return { counts, widthPs, skipFrom, skipTo };
}
