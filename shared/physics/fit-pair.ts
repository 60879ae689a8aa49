import type { PairCovariance } from './double-gaussian';
import { blockInfluence, FIT_PARAMETERS, fitShape, type ShapeFit, type ShapeProblem } from './fit-shape';
import { type PeakShape, pixelNodes } from './gaussian-cells';
import { addMomentSums, covarianceOfSums, MOMENT_SUMS } from './moments';

/**
 * Net fit of a joint map [x2][x1]: a bivariate Gaussian averaged over pixels, truncated to the array, on a background
 * whose shape is the product of the arms' singles (accidentals pair unrelated tags) and whose size is measured in
 * shifted windows. Poisson maximum likelihood. Pixel indices throughout.
 */
export interface PairFitInput {
  n1: number;
  n2: number;
  slices: number;
  /** slices * n2 * n1 raw counts of the prompt window. */
  prompt: Float64Array;
  /** Same, all shifted windows together. */
  shifted: Float64Array;
  windows: number;
  /** Singles per column of arm 1 and arm 2, and the share of each column that is not masked (0..1). */
  singles1: Float64Array;
  singles2: Float64Array;
  open1: Float64Array;
  open2: Float64Array;
}

export interface PairFit {
  fit: ShapeFit;
  /** Fitted covariance with the pixels' a^2/12 left on both coordinates: what the detector saw. */
  blurred: PairCovariance;
  /** Prompt counts and expected accidentals over the array. */
  raw: number;
  accidentals: number;
  /** Totals over slices, [x2][x1]. */
  total: Float64Array;
  backgroundMap: Float64Array;
  use: Uint8Array;
  /** Share of the fitted pairs outside the array. */
  outside: number;
  /** Pearson chi^2 over cells with 5 or more expected counts, the rest pooled. */
  chi2: number;
  ndf: number;
  /** slices * FIT_PARAMETERS. */
  influence: Float64Array;
}

export const PIXEL_VARIANCE = 1 / 12;
/** Narrower than a fifth of a pixel cannot be told from zero. */
const LEAST_VARIANCE = 0.04 / 2;

/** Null when nothing is left to fit (no net pairs, or all of them in one cell's column). */
export function fitPair(input: PairFitInput): PairFit | null {
  const { n1, n2, slices, windows } = input;
  const cells = n1 * n2;
  const total = sumSlices(input.prompt, slices, cells);
  const shifted = sumSlices(input.shifted, slices, cells);
  const accidentals = windows > 0 ? sum(shifted) / windows : 0;
  const raw = sum(total);
  const { use, envelope } = openCells(input);
  const background = outerProduct(input, use);
  // Where none was seen, half a count keeps lone far-off pairs from having probability zero.
  const amplitude = Math.max(accidentals, windows > 0 ? 0.5 / windows : 0.5);
  const start = startingPoint(total, background, accidentals, n1, n2);
  if (start === null) return null;
  const problem: ShapeProblem = {
    grid: { nx: n1, ny: n2, x0: 0, y0: 0 },
    nodes: pixelNodes[nodesFor(start)],
    data: total,
    use,
    envelope,
    background,
    backgroundAmplitude: amplitude,
    freeAmplitude: true,
    freeBackground: false,
    freeCentre: true,
    variance: null,
    start: { amplitude: Math.max(raw - accidentals, 1), shape: start },
    leastVariance: LEAST_VARIANCE,
  };
  let fit = fitShape(problem);
  const wanted = nodesFor(fit.shape);
  if (wanted > nodesFor(start)) {
    const refined = { amplitude: fit.amplitude, shape: fit.shape };
    fit = fitShape({ ...problem, nodes: pixelNodes[wanted], start: refined });
  }
  const { shape } = fit;
  const { chi2, ndf } = pearson(total, fit.model, use, 6);
  const inside = fit.bare.reduce((part, v) => part + v, 0);
  const influence = blockInfluence(
    fit,
    slices,
    (s, c) => input.prompt[s * cells + c] as number,
    (s) => ({
      amplitude: 0,
      background: windows > 0 ? sumRange(input.shifted, s * cells, (s + 1) * cells) / windows : 0,
    }),
  );
  return {
    fit,
    blurred: { v1: shape.xx + PIXEL_VARIANCE, v2: shape.yy + PIXEL_VARIANCE, c: shape.xy },
    raw,
    accidentals,
    total,
    backgroundMap: background.map((b) => b * accidentals),
    use,
    outside: Math.min(Math.max(1 - inside / fit.amplitude, 0), 1),
    chi2,
    ndf,
    influence,
  };
}

/** Parameters of resample r as blurred covariance; `moves` from resampleSums over (weights - 1). */
export function movedCovariance(fit: PairFit, moves: Float64Array, at: number): PairCovariance {
  return {
    v1: fit.blurred.v1 + (moves[at + 3] as number),
    v2: fit.blurred.v2 + (moves[at + 5] as number),
    c: fit.blurred.c + (moves[at + 4] as number),
  };
}

/** Sum over slices of weight * influence minus the unweighted sum: moves of every resample. */
export function totalInfluence(influence: Float64Array): Float64Array {
  const out = new Float64Array(FIT_PARAMETERS);
  for (let k = 0; k < influence.length; k += 1) {
    const p = k % FIT_PARAMETERS;
    out[p] = (out[p] as number) + (influence[k] as number);
  }
  return out;
}

function openCells(input: PairFitInput): { use: Uint8Array; envelope: Float64Array } {
  const { n1, n2, open1, open2 } = input;
  const use = new Uint8Array(n1 * n2);
  const envelope = new Float64Array(n1 * n2);
  for (let x2 = 0; x2 < n2; x2 += 1) {
    for (let x1 = 0; x1 < n1; x1 += 1) {
      const open = (open1[x1] as number) * (open2[x2] as number);
      envelope[x2 * n1 + x1] = open;
      use[x2 * n1 + x1] = open > 0 ? 1 : 0;
    }
  }
  return { use, envelope };
}

/** Product of the singles, normalised to 1 over the open cells. */
function outerProduct(input: PairFitInput, use: Uint8Array): Float64Array {
  const { n1, n2, singles1, singles2 } = input;
  const out = new Float64Array(n1 * n2);
  let all = 0;
  for (let c = 0; c < out.length; c += 1) {
    if (use[c] !== 1) continue;
    const v = (singles1[c % n1] as number) * (singles2[Math.floor(c / n1)] as number);
    out[c] = v;
    all += v;
  }
  return all > 0 ? out.map((v) => v / all) : out.map((_, c) => (use[c] === 1 ? 1 / out.length : 0));
}

/**
 * Net moments; when the accidentals drown them, the moments of the cells that stand three standard deviations out of
 * the accidentals.
 */
function startingPoint(
  total: Float64Array,
  background: Float64Array,
  accidentals: number,
  n1: number,
  n2: number,
): ShapeFit['shape'] | null {
  const net = total.map((n, c) => n - accidentals * (background[c] as number));
  const bright = net.map((v, c) => {
    const expected = accidentals * (background[c] as number);
    return v > 3 * Math.sqrt(expected + 1) ? v : 0;
  });
  for (const map of [sum(bright) > 0.3 * sum(net) ? bright : net, net, total]) {
    const sums = new Float64Array(MOMENT_SUMS);
    addMomentSums(map, 0, n1, n2, 1, sums, 0);
    const found = covarianceOfSums(sums);
    if (found === null) continue;
    const n = sums[0] as number;
    const xx = Math.max(found.v1 - PIXEL_VARIANCE, 0.1);
    const yy = Math.max(found.v2 - PIXEL_VARIANCE, 0.1);
    const limit = 0.995 * Math.sqrt(xx * yy);
    const xy = Math.min(Math.max(found.c, -limit), limit);
    if (Number.isFinite(xx + yy + xy)) {
      return { mx: (sums[1] as number) / n, my: (sums[2] as number) / n, xx, xy, yy };
    }
  }
  return null;
}

/** Nodes per pixel and axis for the width across the ridge, pixel^2. */
function nodesFor({ xx, xy, yy }: PeakShape): 2 | 4 | 8 {
  const narrow = (xx + yy) / 2 - Math.hypot((xx - yy) / 2, xy);
  if (narrow > 2.25) return 2;
  return narrow > 0.25 ? 4 : 8;
}

/** Pearson chi^2; cells that expect fewer than 5 counts share pooled bins of at least 5. */
export function pearson(
  data: Float64Array,
  model: Float64Array,
  use: Uint8Array,
  parameters: number,
): { chi2: number; ndf: number } {
  let chi2 = 0;
  let bins = 0;
  let pooledModel = 0;
  let pooledData = 0;
  for (let c = 0; c < data.length; c += 1) {
    if (use[c] !== 1) continue;
    const expected = model[c] as number;
    if (expected >= 5) {
      chi2 += ((data[c] as number) - expected) ** 2 / expected;
      bins += 1;
      continue;
    }
    pooledModel += expected;
    pooledData += data[c] as number;
    if (pooledModel < 5) continue;
    chi2 += (pooledData - pooledModel) ** 2 / pooledModel;
    bins += 1;
    pooledModel = 0;
    pooledData = 0;
  }
  return { chi2, ndf: Math.max(bins - parameters, 0) };
}

export function sumSlices(maps: Float64Array, slices: number, cells: number): Float64Array {
  const out = new Float64Array(cells);
  for (let s = 0; s < slices; s += 1) {
    for (let c = 0; c < cells; c += 1) out[c] = (out[c] as number) + (maps[s * cells + c] as number);
  }
  return out;
}

function sum(values: Float64Array): number {
  return sumRange(values, 0, values.length);
}

function sumRange(values: Float64Array, start: number, end: number): number {
  let out = 0;
  for (let k = start; k < end; k += 1) out += values[k] as number;
  return out;
}
