import type { PairTally, TagTally } from '../../../shared/contracts/tally';
import { type BlockWeights, recentre, resampleSums } from '../../../shared/physics/bootstrap';
import {
  type ConditionalVariance,
  columnSums,
  conditionalVariance,
  weightedVariance,
} from '../../../shared/physics/conditional';
import { type PairCovariance, pairVariances } from '../../../shared/physics/double-gaussian';
import {
  fitPair,
  movedCovariance,
  type PairFit,
  sumSlices,
  totalInfluence,
} from '../../../shared/physics/fit-pair';
import { FIT_PARAMETERS } from '../../../shared/physics/fit-shape';
import { addMomentSums, covarianceOfSums, MOMENT_SUMS } from '../../../shared/physics/moments';
import { type AxisName, type AxisResult, type AxisVariances, noVariances } from './plane-result';
import type { Resampled } from './resampled';

/** Crystal units per pixel of either arm. */
export interface ArmScales {
  signal: number;
  idler: number;
}

export interface TagAxis {
  result: AxisResult;
  fit: PairFit | null;
  /** Raw columns with too few counts to have a variance. */
  rawColumns: ConditionalVariance;
  /** Joint counts over all slices, [x2][x1]; those of all shifted windows together. */
  prompt: Float64Array;
  shifted: Float64Array;
  n1: number;
  n2: number;
}

/** The fit where its numbers may be used; null where it did not converge or ended at the least width it can tell. */
export function goodFit({ fit }: Pick<TagAxis, 'fit'>): PairFit | null {
  return fit === null || !fit.fit.converged || fit.fit.atFloor ? null : fit;
}

/** Joint counts of one axis: fit, moments and raw moments, each with its resamples. `weights` null: too few blocks. */
export function analyseTagAxis(
  tally: TagTally,
  axis: AxisName,
  scales: ArmScales,
  weights: BlockWeights | null,
): TagAxis {
  const joint = (pairs: PairTally): Float64Array => (axis === 'x' ? pairs.jointX : pairs.jointY);
  const n1 = axis === 'x' ? tally.a.width : tally.a.height;
  const n2 = axis === 'x' ? tally.b.width : tally.b.height;
  const { slices } = tally;
  const windows = tally.window.shiftsTick.length;
  const prompt = joint(tally.prompt);
  const shifted = joint(tally.shifted);
  const signal = marginalOf(tally.a, axis);
  const idler = marginalOf(tally.b, axis);
  const fit = fitPair({
    n1,
    n2,
    slices,
    prompt,
    shifted,
    windows,
    singles1: signal.singles,
    singles2: idler.singles,
    open1: signal.open,
    open2: idler.open,
  });
  const sums = momentSums(prompt, shifted, windows, slices, n1, n2);
  const columns = {
    x1: columnRows(prompt, slices, n1, n2, 'x1'),
    x2: columnRows(prompt, slices, n1, n2, 'x2'),
  };
  const rawColumns = conditionalVariance(columns.x1.total);
  const counted = {
    fit,
    rawColumns,
    prompt: sumSlices(prompt, slices, n1 * n2),
    shifted: sumSlices(shifted, slices, n1 * n2),
    n1,
    n2,
  };
  if (weights === null) {
    const result: AxisResult = { net: noVariances, moment: noVariances, raw: noVariances };
    return { ...counted, result };
  }
  const how = `block bootstrap, ${slices} slices of time`;
  const sound = goodFit(counted);
  const raw = momentVariances(
    sums.raw,
    scales,
    weights,
    `moments of the raw counts over the whole map; ${how}`,
  );
  return {
    result: {
      net: sound === null ? noVariances : fitVariances(sound, scales, weights, how),
      moment: momentVariances(
        sums.net,
        scales,
        weights,
        `second moments over the whole map, accidentals subtracted; ${how}`,
      ),
      raw: {
        ...raw,
        conditionalSignal: rawConditional(columns.x1, scales.signal ** 2, weights, how),
        conditionalIdler: rawConditional(columns.x2, scales.idler ** 2, weights, how),
      },
    },
    ...counted,
  };
}

/** Singles per column (row for y), and the share of the column that is open, weighted with the light along it. */
function marginalOf(arm: TagTally['a'], axis: AxisName): { singles: Float64Array; open: Float64Array } {
  const { width, height } = arm;
  const along = axis === 'x' ? height : width;
  const across = axis === 'x' ? width : height;
  const pixel = (a: number, b: number): number => (axis === 'x' ? b * width + a : a * width + b);
  const profile = new Float64Array(along);
  for (let b = 0; b < along; b += 1) {
    let open = 0;
    let sum = 0;
    for (let a = 0; a < across; a += 1) {
      if (arm.masked[pixel(a, b)] === 1) continue;
      open += 1;
      sum += arm.singles[pixel(a, b)] as number;
    }
    profile[b] = open > 0 ? sum / open : 0;
  }
  const light = profile.reduce((sum, v) => sum + v, 0);
  const singles = new Float64Array(across);
  const open = new Float64Array(across);
  for (let a = 0; a < across; a += 1) {
    for (let b = 0; b < along; b += 1) {
      if (arm.masked[pixel(a, b)] === 1) continue;
      singles[a] = (singles[a] as number) + (arm.singles[pixel(a, b)] as number);
      open[a] = (open[a] as number) + (light > 0 ? (profile[b] as number) / light : 1 / along);
    }
  }
  return { singles, open };
}

function momentSums(
  prompt: Float64Array,
  shifted: Float64Array,
  windows: number,
  slices: number,
  n1: number,
  n2: number,
): { raw: Float64Array; net: Float64Array } {
  const raw = new Float64Array(slices * MOMENT_SUMS);
  const net = new Float64Array(slices * MOMENT_SUMS);
  for (let s = 0; s < slices; s += 1) {
    addMomentSums(prompt, s * n1 * n2, n1, n2, 1, raw, s * MOMENT_SUMS);
    if (windows > 0) addMomentSums(shifted, s * n1 * n2, n1, n2, -1 / windows, net, s * MOMENT_SUMS);
  }
  raw.forEach((v, k) => {
    net[k] = (net[k] as number) + v;
  });
  return { raw, net };
}

function momentVariances(
  rows: Float64Array,
  scales: ArmScales,
  weights: BlockWeights,
  method: string,
): AxisVariances {
  const total = new Float64Array(MOMENT_SUMS);
  rows.forEach((v, k) => {
    total[k % MOMENT_SUMS] = (total[k % MOMENT_SUMS] as number) + v;
  });
  const value = covarianceOfSums(total);
  if (value === null) return noVariances;
  const sums = resampleSums(weights, rows, MOMENT_SUMS);
  return variancesOf(
    value,
    weights.resamples,
    (r) => covarianceOfSums(sums, r * MOMENT_SUMS),
    scales,
    method,
    Math.round(total[0] as number),
  );
}

function fitVariances(fit: PairFit, scales: ArmScales, weights: BlockWeights, how: string): AxisVariances {
  const moves = resampleSums(weights, fit.influence, FIT_PARAMETERS);
  const base = totalInfluence(fit.influence);
  moves.forEach((v, k) => {
    moves[k] = v - (base[k % FIT_PARAMETERS] as number);
  });
  return variancesOf(
    fit.blurred,
    weights.resamples,
    (r) => movedCovariance(fit, moves, r * FIT_PARAMETERS),
    scales,
    `Gaussian on measured accidentals, Poisson maximum likelihood, pixel blur left in; ${how}`,
    Math.round(Math.max(fit.raw - fit.accidentals, 0)),
  );
}

/** Pixel covariances to crystal units, for the value and every resample. */
function variancesOf(
  value: PairCovariance,
  resamples: number,
  resampleAt: (r: number) => PairCovariance | null,
  scales: ArmScales,
  method: string,
  n: number,
): AxisVariances {
  const names = ['minus', 'plus', 'conditionalSignal', 'conditionalIdler', 'signal', 'correlation'] as const;
  const rows = names.map(() => new Float64Array(resamples).fill(Number.NaN));
  for (let r = 0; r < resamples; r += 1) {
    const found = resampleAt(r);
    if (found === null) continue;
    const numbers = numbersOf(scaled(found, scales));
    rows.forEach((row, k) => {
      row[r] = numbers[k] as number;
    });
  }
  const central = numbersOf(scaled(value, scales));
  const part = (k: number): Resampled => ({
    value: central[k] as number,
    resampled: rows[k] as Float64Array,
    method,
    n,
  });
  return {
    minus: part(0),
    plus: part(1),
    conditionalSignal: part(2),
    conditionalIdler: part(3),
    signal: part(4),
    correlation: part(5),
  };
}

function scaled({ v1, v2, c }: PairCovariance, { signal, idler }: ArmScales): PairCovariance {
  return { v1: v1 * signal * signal, v2: v2 * idler * idler, c: c * signal * idler };
}

function numbersOf(covariance: PairCovariance): number[] {
  const { minus, plus, conditional1, conditional2 } = pairVariances(covariance);
  const correlation = covariance.c / Math.sqrt(covariance.v1 * covariance.v2);
  return [minus, plus, conditional1, conditional2, covariance.v1, correlation];
}

interface ColumnRows {
  rows: Float64Array;
  total: Float64Array;
}

function columnRows(
  prompt: Float64Array,
  slices: number,
  n1: number,
  n2: number,
  over: 'x1' | 'x2',
): ColumnRows {
  const width = 3 * (over === 'x1' ? n2 : n1);
  const rows = new Float64Array(slices * width);
  const total = new Float64Array(width);
  for (let s = 0; s < slices; s += 1) {
    const sums = columnSums(prompt, s * n1 * n2, n1, n2, over);
    rows.set(sums, s * width);
    sums.forEach((v, k) => {
      total[k] = (total[k] as number) + v;
    });
  }
  return { rows, total };
}

function rawConditional(
  { rows, total }: ColumnRows,
  scale: number,
  weights: BlockWeights,
  how: string,
): Resampled | null {
  const found = conditionalVariance(total);
  if (!Number.isFinite(found.value)) return null;
  const sums = resampleSums(weights, rows, total.length);
  const resampled = new Float64Array(weights.resamples);
  for (let r = 0; r < weights.resamples; r += 1) {
    resampled[r] = scale * weightedVariance(sums, r * total.length, found.kept, 'n-1');
  }
  const value = scale * found.value;
  let n = 0;
  for (let k = 0; k < total.length; k += 3) n += total[k] as number;
  return {
    value,
    resampled: recentre(resampled, value),
    method: `mean conditional variance of the raw columns, divisor n - 1; ${how}, bias taken out`,
    n,
  };
}
