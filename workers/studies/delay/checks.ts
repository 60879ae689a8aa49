import type { Check } from '../../../shared/contracts/output';
import {
  checkAccidentalsAgree,
  checkPairsEnough,
  checkPeakCentred,
  checkPeakFound,
  checkWindowCut,
} from '../peak-checks';
import type { ArmPair } from '../peak-search';
import {
  checkBaseline,
  checkDrift,
  checkExcessNoise,
  checkLiveTime,
  checkMapped,
  checkOrder,
  checkPixels,
  checkSaturation,
} from '../run-checks';
import type { TagCount } from '../tag-count';

/** 3 % on the net rate; below a tenth of that nothing but the peak itself can be believed. */
const GOOD_PAIRS = 1000;
const LEAST_PAIRS = 100;

export function checkDelay(
  count: TagCount,
  arms: ArmPair,
  deadNs: number,
  excess: readonly { id: string; ratio: number }[],
): Check[] {
  const arrays = [
    { arm: count.tally.a, name: arms.a },
    { arm: count.tally.b, name: arms.b },
  ];
  return [
    checkPeakFound(count),
    checkPairsEnough(count, LEAST_PAIRS, GOOD_PAIRS),
    checkWindowCut(count),
    checkPeakCentred(count),
    checkAccidentalsAgree(count),
    checkBaseline(count),
    checkDrift(count, arms),
    checkExcessNoise(excess),
    checkPixels(arrays),
    checkSaturation(arrays, count.times, deadNs),
    checkOrder(count),
    checkMapped(count),
    checkLiveTime(count),
  ];
}
