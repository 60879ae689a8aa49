import type { DialValues } from '../../../shared/contracts/dial';
import type { StudyOutput } from '../../../shared/contracts/output';
import type { TagTally } from '../../../shared/contracts/tally';
import { checkClock, clockQuantities } from '../clock';
import { LOOK_RESAMPLES, numberDial } from '../dials';
import { formatFigure } from '../format-figure';
import { type ArmPair, describeArms } from '../peak-search';
import { listQuantities, settingQuantity } from '../quantities';
import { resampleSlices } from '../resample-slices';
import type { Chosen, ClockFacts } from '../study';
import { countTags, type TagCount } from '../tag-count';
import { chosenDials } from '../tag-main';
import { histogramMap, rateMap, singlesMap } from '../tag-maps';
import {
  accidentalsOf,
  carOf,
  coincidencesOf,
  g2PeakOf,
  heraldingOf,
  peakOf,
  singlesOf,
  sliceColumns,
} from '../tag-numbers';
import { checkDelay } from './checks';

export interface DelayRequest {
  tally: TagTally;
  arms: ArmPair;
  dials: DialValues;
  chosen: Chosen;
  clock?: ClockFacts | undefined;
  seed: number;
  partial: boolean;
}

export function finishDelay(request: DelayRequest): StudyOutput {
  const { tally, arms, dials, chosen, clock, seed, partial } = request;
  const count = countTags(tally);
  const resamples = partial ? LOOK_RESAMPLES : numberDial(dials, 'resamples');
  const draws = resampleSlices(sliceColumns(count), resamples, seed);
  const list = listQuantities(
    [
      ...singlesOf(count, arms),
      ...peakOf(count),
      ...coincidencesOf(count),
      ...accidentalsOf(count),
      carOf(count),
      heraldingOf(count, 'a', arms, numberDial(dials, `dark.${arms.b}`)),
      heraldingOf(count, 'b', arms, numberDial(dials, `dark.${arms.a}`)),
      g2PeakOf(count),
    ],
    draws,
    tally.slices,
  );
  return {
    study: 'delay',
    quantities: {
      ...list.quantities,
      ...clockQuantities(clock),
      'window.width': settingQuantity(
        count.windowPs,
        'ps',
        'full width, whole ticks, both ends counted',
        count.inWindow,
      ),
    },
    verdicts: {},
    checks: [...checkDelay(count, arms, numberDial(dials, 'dead.time'), list.excess), ...checkClock(clock)],
    maps: {
      'delay.histogram': histogramMap(count),
      [`rates.${arms.a}`]: rateMap(count, 'a', arms.a),
      [`rates.${arms.b}`]: rateMap(count, 'b', arms.b),
      ...(arms.a === 'bucket' ? {} : { [`singles.${arms.a}`]: singlesMap(tally.a, arms.a) }),
      [`singles.${arms.b}`]: singlesMap(tally.b, arms.b),
    },
    chosen: chosenDials(dials, chosen),
    statement: stateDelay(count, arms),
  };
}

function stateDelay(count: TagCount, arms: ArmPair): string {
  const { windowPs, windowCentrePs, fraction, shifts, seconds } = count;
  const kept =
    fraction === null
      ? 'No peak was fitted, so no share of it and no heralding efficiency is given.'
      : `It keeps ${(fraction.value * 100).toFixed(1)} % of the fitted Gaussian, for which the heralding efficiencies are corrected.`;
  return [
    `Time tags of the ${describeArms(arms)} arms over ${formatFigure(seconds)} s, delay counted as ${arms.b} minus ${arms.a}.`,
    `Coincidences are all pairs inside a window of ${formatFigure(windowPs)} ps full width centred on ${formatFigure(windowCentrePs)} ps. ${kept}`,
    `Numbers with accidentals subtracted and the CAR, quoted as (C - A)/A, use the mean of ${shifts} windows shifted clear of the peak; the product of the singles and the sideband of the histogram are given beside it.`,
    'Assumed: live time from the first to the last tag without empty slices, no correction for dead time or afterpulsing, a Gaussian peak; a heralding efficiency includes optics and mode coupling.',
  ].join(' ');
}
