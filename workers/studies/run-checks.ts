import type { Check } from '../../shared/contracts/output';
import type { ArmTally } from '../../shared/contracts/tally';
import { trueRateNonParalysable } from '../../shared/physics/dead-time';
import { g2 } from '../../shared/physics/timing';
import { formatFigure } from './format-figure';
import type { ArmPair } from './peak-search';
import type { SliceTimes } from './slice-times';
import { sum, type TagCount } from './tag-count';

/** Questions about the run as a whole: drift, gaps, order, pixels. */

/** Rates and net pairs of the second half of the run against the first. */
export function checkDrift(count: TagCount, arms: ArmPair): Check {
  const { tally, times, shifts } = count;
  const half = Math.floor(tally.slices / 2);
  const compare = (name: string, perSlice: Float64Array, extra: Float64Array | null) => {
    const part = (from: number, to: number) => {
      const seconds = sum(times.seconds.subarray(from, to));
      const main = sum(perSlice.subarray(from, to));
      const off = extra === null ? 0 : sum(extra.subarray(from, to));
      const m = Math.max(1, shifts);
      return { rate: (main - off / m) / seconds, variance: (main + off / m ** 2) / seconds ** 2 };
    };
    const first = part(0, half);
    const second = part(half, tally.slices);
    const error = Math.sqrt(first.variance + second.variance);
    const change = (second.rate - first.rate) / first.rate;
    return { name, change, z: Math.abs(second.rate - first.rate) / error };
  };
  const unit = '%';
  if (tally.slices < 4) {
    const sentence = 'The run is too short to compare its halves.';
    return { id: 'drift', status: 'caution', figure: null, unit, sentence };
  }
  const changes = [
    compare(`${arms.a} singles`, tally.a.singlesPerSlice, null),
    compare(`${arms.b} singles`, tally.b.singlesPerSlice, null),
    compare('number of pairs with accidentals subtracted', tally.prompt.pairs, tally.shifted.pairs),
  ].filter((change) => Number.isFinite(change.change) && change.z > 3);
  const worst = changes.sort((p, q) => Math.abs(q.change) - Math.abs(p.change))[0];
  if (worst === undefined) {
    const sentence = 'Singles and pairs of both halves of the run agree within 3 standard errors.';
    return { id: 'drift', status: 'pass', figure: 0, unit, sentence };
  }
  const percent = worst.change * 100;
  const status = Math.abs(percent) < 2 ? 'pass' : Math.abs(percent) < 15 || worst.z < 5 ? 'caution' : 'fail';
  const advice =
    status === 'pass' ? 'too little to matter.' : 'look at the rates over time and cut what drifted.';
  const sentence = `The ${worst.name} changed by ${percent.toFixed(1)} % from the first to the second half (${worst.z.toFixed(1)} standard errors): ${advice}`;
  return { id: 'drift', status, figure: percent, unit, sentence };
}

/** Baseline of g2 beside the peak, which is 1 for unrelated tags. */
export function checkBaseline(count: TagCount): Check {
  const id = 'baseline-flat';
  const unit = '1';
  const { sideband, seconds, countsA, countsB, histogram } = count;
  if (!count.times.known) {
    const sentence = 'The live time is not known, so the baseline of g2 could not be checked.';
    return { id, status: 'caution', figure: null, unit, sentence };
  }
  const request = {
    pairs: sideband?.counts ?? 0,
    countsA,
    countsB,
    binS: (sideband?.widthPs ?? 0) * 1e-12,
    tauS: (histogram.step * histogram.counts.length * 1e-12) / 4,
    spanS: seconds,
  };
  const base = g2(request);
  if (base === null || request.pairs === 0) {
    const sentence =
      'No accidentals were counted beside the peak, so the baseline of g2 could not be checked.';
    return { id, status: 'caution', figure: null, unit, sentence };
  }
  const off = Math.abs(base.value - 1);
  // The error that a g2 of 1 would have: with few counts the measured one is too small when the value is low.
  const z = off / Math.sqrt(base.value / request.pairs + 1 / countsA + 1 / countsB);
  const value = `Beside the peak g2 is ${base.value.toFixed(4)} ± ${base.sigma.toFixed(4)}`;
  if (z <= 3 || off < 0.01) {
    return { id, status: 'pass', figure: base.value, unit, sentence: `${value}; it should be 1.` };
  }
  const status = off < 0.05 || z < 5 ? 'caution' : 'fail';
  const sentence = `${value} where 1 was expected: the rates drift together, or the tagger lost stretches of time.`;
  return { id, status, figure: base.value, unit, sentence };
}

/**
 * Pixels far from the median of those around them (5 x 5): dead below a twentieth of it where at least 20 counts were
 * expected, hot above five times it and five sigma. A smooth beam does not do that from one pixel to the next.
 */
export function checkPixels(arms: readonly { arm: ArmTally; name: string }[]): Check {
  const odd: string[] = [];
  for (const { arm, name } of arms) {
    const alive = [...arm.singles.keys()].filter((pixel) => arm.masked[pixel] === 0);
    if (alive.length < 9) continue;
    for (const pixel of alive) {
      const n = arm.singles[pixel]!;
      const at = `${name} (${pixel % arm.width}, ${Math.floor(pixel / arm.width)})`;
      const around = neighbourMedian(arm, pixel);
      if (n > 5 * Math.max(around, 1) && n > around + 5 * Math.sqrt(around + 1)) {
        odd.push(`${at} hot`);
      } else if (around >= 20 && n < around / 20) odd.push(`${at} dead`);
    }
  }
  const base = { id: 'pixels-sound', figure: odd.length, unit: 'pixels' };
  if (odd.length === 0) {
    return { ...base, status: 'pass', sentence: 'No pixel is dead or far brighter than those around it.' };
  }
  const named = odd.slice(0, 6).join(', ') + (odd.length > 6 ? ` and ${odd.length - 6} more` : '');
  const sentence = `Pixels stand apart from those around them: ${named}. Mask them in the detector map.`;
  return { ...base, status: 'caution', sentence };
}

/** Share of photons that the busiest pixel loses to its dead time, m t_d for a non-paralysable one. */
export function checkSaturation(
  arms: readonly { arm: ArmTally; name: string }[],
  times: SliceTimes,
  deadNs: number,
): Check {
  const id = 'pixels-saturated';
  const unit = '%';
  const seconds = times.known ? times.liveS : 0;
  let busiest = { rate: 0, at: '' };
  for (const { arm, name } of seconds > 0 ? arms : []) {
    for (const [pixel, n] of arm.singles.entries()) {
      if (!(n / seconds > busiest.rate)) continue;
      busiest = { rate: n / seconds, at: `${name} (${pixel % arm.width}, ${Math.floor(pixel / arm.width)})` };
    }
  }
  if (busiest.at === '') {
    return {
      id,
      status: 'caution',
      figure: null,
      unit,
      sentence: 'The live time is not known, and so the rate of no pixel.',
    };
  }
  const truth = trueRateNonParalysable(busiest.rate, deadNs * 1e-9);
  const lost = truth === null ? 100 : 100 * (1 - busiest.rate / truth);
  const what = `The busiest pixel, ${busiest.at}, counts ${formatFigure(busiest.rate)} tags/s`;
  if (truth === null) {
    const sentence = `${what}, more than a dead time of ${deadNs} ns allows; correct the dead time or the map.`;
    return { id, status: 'fail', figure: lost, unit, sentence };
  }
  const loses = `${what} and loses ${formatFigure(lost)} % of its light to a dead time of ${deadNs} ns`;
  if (lost < 2) return { id, status: 'pass', figure: lost, unit, sentence: `${loses}.` };
  const sentence = `${loses}; attenuate, or the singles, heralding efficiencies and image are too low there.`;
  return { id, status: lost < 10 ? 'caution' : 'fail', figure: lost, unit, sentence };
}

export function checkOrder(count: TagCount): Check {
  const { outOfOrder, tags } = count.tally;
  const base = { id: 'tags-in-order', figure: outOfOrder, unit: 'tags' };
  if (outOfOrder === 0) return { ...base, status: 'pass', sentence: 'Every tag came in order of time.' };
  const status = outOfOrder > tags / 1000 ? 'fail' : 'caution';
  const sentence = `${outOfOrder} of ${tags} tags came more than 5 ms after a later one and may miss partners; look at the rollover in the layout, and at the recorder.`;
  return { ...base, status, sentence };
}

export function checkMapped(count: TagCount): Check {
  const { unmapped, tags } = count.tally;
  const share = unmapped / Math.max(1, unmapped + tags);
  const base = { id: 'tags-mapped', figure: share * 100, unit: '%' };
  if (share <= 0.1) {
    const sentence = `${(share * 100).toFixed(1)} % of the tags are on masked channels or on none of the two arms.`;
    return { ...base, status: 'pass', sentence };
  }
  const sentence = `${(share * 100).toFixed(1)} % of the tags are on channels that the detector map masks or does not name for these arms; check first channels and sizes.`;
  return { ...base, status: 'caution', sentence };
}

/** Live time runs from the first to the last tag without the slices that hold none. */
export function checkLiveTime(count: TagCount): Check {
  const { tally, times, seconds } = count;
  const { empty } = times;
  const base = { id: 'live-time', figure: empty, unit: 'slices' };
  if (!(seconds > 0)) {
    if (tally.tags < 2) {
      const sentence = 'Fewer than two tags were read, so there is no live time and no rate.';
      return { ...base, status: 'caution', sentence };
    }
    const sentence = `All ${tally.tags} tags carry the same time, so there is no live time and no rate; look at the time field of the layout (its dataset, column or bytes).`;
    return { ...base, status: 'fail', sentence };
  }
  if (!times.gapsSeen) {
    const sentence = `Too few tags to see gaps; live time is taken from the first to the last tag, ${formatFigure(seconds)} s${times.known ? '' : ', and no rate is given'}.`;
    return { ...base, status: 'caution', sentence };
  }
  if (empty === 0) {
    const sentence = `Live time is taken from the first to the last tag, ${formatFigure(seconds)} s; no stretch of it is empty.`;
    return { ...base, status: 'pass', sentence };
  }
  const gaps = `${empty} of ${tally.slices} slices of time hold no tag`;
  if (!times.known) {
    const sentence = `${gaps}, and so much of the rest lies beside a gap and may be partly empty that the live time is not known and no rate is given. Cut the gap out, and look at the time field of the layout.`;
    return { ...base, status: 'fail', sentence };
  }
  const sentence = `${gaps} and are left out of the live time of ${formatFigure(seconds)} s. Cut the gap out.`;
  return { ...base, status: empty > tally.slices / 20 ? 'fail' : 'caution', sentence };
}

export function checkExcessNoise(excess: readonly { id: string; ratio: number }[]): Check {
  const worst = [...excess].sort((p, q) => q.ratio - p.ratio)[0];
  if (worst === undefined) {
    const sentence = 'Slices of time scatter as counting alone makes them.';
    return { id: 'excess-noise', status: 'pass', figure: null, unit: '', sentence };
  }
  const sentence = `${worst.id} scatters between slices of time ${worst.ratio.toFixed(1)} times as much as counting alone explains (drift or afterpulsing); the larger error is the one reported.`;
  return { id: 'excess-noise', status: 'caution', figure: worst.ratio, unit: '', sentence };
}

function neighbourMedian(arm: ArmTally, pixel: number): number {
  const x = pixel % arm.width;
  const y = Math.floor(pixel / arm.width);
  const around: number[] = [];
  for (let v = Math.max(0, y - 2); v <= Math.min(arm.height - 1, y + 2); v++) {
    for (let u = Math.max(0, x - 2); u <= Math.min(arm.width - 1, x + 2); u++) {
      const at = v * arm.width + u;
      if (at !== pixel && arm.masked[at] === 0) around.push(arm.singles[at]!);
    }
  }
  around.sort((p, q) => p - q);
  return around[Math.floor(around.length / 2)] ?? 0;
}
