import { coincidencesToAccidentals, heraldingEfficiency } from '../../shared/physics/coincidence';
import type { Estimate } from '../../shared/physics/estimate';
import { countRate, g2 } from '../../shared/physics/timing';
import type { ArmPair } from './peak-search';
import type { Measured } from './quantities';
import { checkBaseline, checkLiveTime } from './run-checks';
import type { TagCount } from './tag-count';

/** Columns of a resample: seconds, tags of arm A, of arm B, pairs in the window, pairs in the shifted windows. */
export function sliceColumns(count: TagCount): Float64Array[] {
  const { tally, times } = count;
  return [
    times.seconds,
    tally.a.singlesPerSlice,
    tally.b.singlesPerSlice,
    tally.prompt.pairs,
    tally.shifted.pairs,
  ];
}

type Totals = readonly number[];
const SECONDS = 0;
const TAGS_A = 1;
const TAGS_B = 2;
const PROMPT = 3;
const SHIFTED = 4;

/** A rate over a live time that is not known is no number. */
function rateOf(count: TagCount, counted: Estimate | null): Estimate | null {
  const { seconds, times } = count;
  if (counted === null || !times.known) return null;
  return { value: counted.value / seconds, sigma: counted.sigma / seconds };
}

/** The product of the singles rates is the accidentals only where the rates are steady over a known live time. */
function isSteady(count: TagCount): boolean {
  return (
    count.times.known && [checkLiveTime(count), checkBaseline(count)].every(({ status }) => status !== 'fail')
  );
}

export function singlesOf(count: TagCount, arms: ArmPair): Measured[] {
  const arm = (name: string, counts: number, column: number): Measured => ({
    id: `singles.${name}`,
    estimate: count.times.known ? countRate(counts, count.seconds) : null,
    unit: '1/s',
    n: counts,
    method: 'tags over the live time, from the first to the last tag without empty slices',
    statistic: (t) => t[column]! / t[SECONDS]!,
  });
  return [arm(arms.a, count.countsA, TAGS_A), arm(arms.b, count.countsB, TAGS_B)];
}

/** Fitted place and width of the peak; absent when nothing was fitted. */
export function peakOf(count: TagCount): Measured[] {
  const { fit } = count;
  if (fit === null) return [];
  const shared = {
    unit: 'ps',
    n: Math.round(fit.area),
    method: 'Gaussian on a constant fitted to the delay histogram by Poisson maximum likelihood',
    error: 'inverse Fisher information',
  };
  return [
    { id: 'delay.peak', estimate: { value: fit.centre, sigma: fit.centreError }, ...shared },
    { id: 'delay.sigma', estimate: { value: fit.sigma, sigma: fit.sigmaError }, ...shared },
  ];
}

export function coincidencesOf(count: TagCount): Measured[] {
  const { seconds, net, inWindow, shifts, times } = count;
  return [
    {
      id: 'coincidences.raw',
      estimate: times.known ? countRate(inWindow, seconds) : null,
      unit: '1/s',
      n: inWindow,
      method: 'pairs in the window, nothing subtracted',
      statistic: (t) => t[PROMPT]! / t[SECONDS]!,
    },
    {
      id: 'coincidences.net',
      estimate: rateOf(count, net),
      unit: '1/s',
      n: inWindow,
      method: 'pairs in the window less the mean of the shifted windows',
      statistic: (t) => (t[PROMPT]! - t[SHIFTED]! / shifts) / t[SECONDS]!,
    },
  ];
}

export function accidentalsOf(count: TagCount): Measured[] {
  const { accidentals, shifts, windowPs, sideband } = count;
  return [
    {
      id: 'accidentals.product',
      estimate: isSteady(count) ? rateOf(count, accidentals.product) : null,
      unit: '1/s',
      n: count.countsA + count.countsB,
      method: 'product of the singles rates and the full window',
      statistic: (t) => (t[TAGS_A]! * t[TAGS_B]! * windowPs * 1e-12) / t[SECONDS]! ** 2,
    },
    {
      id: 'accidentals.shifted',
      estimate: rateOf(count, accidentals.shifted),
      unit: '1/s',
      n: count.shiftedCounts,
      method: `mean of ${shifts} shifted windows`,
      statistic: (t) => t[SHIFTED]! / shifts / t[SECONDS]!,
    },
    {
      id: 'accidentals.sideband',
      estimate: rateOf(count, accidentals.sideband),
      unit: '1/s',
      n: sideband?.counts ?? 0,
      method: 'delay histogram beyond six sigma of the peak, scaled to the window',
    },
  ];
}

/** CAR as (C - A)/A. */
export function carOf(count: TagCount): Measured {
  const { accidentals, inWindow, shifts } = count;
  const statistic = (t: Totals): number | null =>
    t[SHIFTED]! > 0 ? (t[PROMPT]! * shifts) / t[SHIFTED]! - 1 : null;
  return {
    id: 'car',
    estimate: coincidencesToAccidentals(inWindow, accidentals.shifted),
    unit: '1',
    n: inWindow,
    method: 'true over accidental pairs, (C - A)/A, A from the shifted windows',
    // With few accidentals the ratio's resamples have a long tail that says nothing of drift.
    ...(count.shiftedCounts >= 100 ? { statistic } : {}),
  };
}

/**
 * Heralding efficiency of the arm that is not the herald; absent while no peak is fitted, because the share of it inside
 * the window is then unknown. `darkRate` is that of the herald.
 */
export function heraldingOf(count: TagCount, of: 'a' | 'b', arms: ArmPair, darkRate: number): Measured {
  const { accidentals, inWindow, shifts, fraction, seconds } = count;
  const heralds = of === 'a' ? count.countsB : count.countsA;
  const column = of === 'a' ? TAGS_B : TAGS_A;
  const herald = of === 'a' ? arms.b : arms.a;
  const kept = fraction?.value ?? 1;
  const darks = darkRate > 0 ? `less ${darkRate} darks/s` : 'darks not taken off';
  const netHeralds = (t: Totals): number => t[column]! - darkRate * t[SECONDS]!;
  return {
    id: `heralding.${arms[of]}`,
    estimate:
      fraction &&
      heraldingEfficiency({
        heralds,
        heraldDarks: darkRate * seconds,
        inWindow,
        accidentals: accidentals.shifted,
        fraction,
      }),
    unit: '1',
    n: heralds,
    method: `pairs, accidentals subtracted, over tags of the ${herald} arm, ${darks}, corrected for the ${(kept * 100).toFixed(1)} % of the peak inside the window`,
    statistic: (t) => (t[PROMPT]! - t[SHIFTED]! / shifts) / netHeralds(t) / kept,
  };
}

/** g2 in the histogram bin at the peak: wider bins than the coherence time average it toward 1. */
export function g2PeakOf(count: TagCount): Measured {
  const { histogram, seconds, countsA, countsB } = count;
  const at = count.fit?.centre ?? count.windowCentrePs;
  const bin = Math.floor((at - histogram.lo) / histogram.step);
  const pairs = histogram.counts[bin];
  return {
    id: 'g2.peak',
    estimate:
      pairs === undefined || !isSteady(count)
        ? null
        : g2({
            pairs,
            countsA,
            countsB,
            binS: histogram.step * 1e-12,
            tauS: at * 1e-12,
            spanS: seconds,
          }),
    unit: '1',
    n: pairs ?? 0,
    method: `all-pairs histogram bin of ${Number(histogram.step.toPrecision(4))} ps at the peak over the product of the rates`,
  };
}
