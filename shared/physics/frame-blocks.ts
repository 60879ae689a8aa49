import type { FrameMap, FrameSums } from './frame-maps';

/**
 * How far apart the sum maps of the blocks of a stack lie, against what counting alone makes of it. Frames that come
 * again (a padded file, a stack written twice, a test pattern) make blocks alike, and a bootstrap over such blocks tells
 * an error near zero.
 */
export interface BlockSpread {
  /** Mean square distance over its expectation, for the blocks closest to each other: 1, or more where light drifts. */
  ratio: number;
  /** Standard error of it. */
  sigma: number;
  /** Blocks from one of a pair to the other. */
  apart: number;
}

/** Bins that are looked at, evenly spread over what is kept block by block. */
const MOST_BINS = 2048;
/** Fewer squares say nothing. */
const LEAST_SQUARES = 100;

/**
 * For every distance m up to half of the blocks, so that frames that repeat after several blocks are found too: the mean
 * over blocks b and bins of (g_b - g_(b+m))^2 / V, g_b the map of block b per difference. The smallest is told. With n_b
 * differences a block, V = v [(n_b - 1/3) / n_b^2 + the same of b+m] - v / (3 n_b n_(b+m)) for neighbours: v is what one
 * difference adds in a long row, where it shares a frame with either neighbour; at the end of a block one is missing,
 * and two neighbouring blocks have a frame in common. Each term then has the mean 1 where the noise of frames is independent
 * (derived here); light that drifts or flickers only adds to it. v is that of the whole stack lowered by `localShare`
 * squared, because slow drift spreads pixels but not differences. Null where there is too little to judge.
 * O(blocks^2 bins / 4).
 *
 * @param differences per block
 */
export function blockSpread(sums: FrameSums, differences: Float64Array, map: FrameMap): BlockSpread | null {
  const local = localShare(sums, differences) ** 2;
  if (!(local > 0)) return null;
  const bins = binsOf(map);
  const weights = Float64Array.from(bins, (c) => (sums.frames - 1) / (local * (map.variance[c] as number)));
  const counts = [...differences].filter((n) => n > 0);
  const maps: Float64Array[] = [];
  differences.forEach((n, b) => {
    if (n > 0) maps.push(Float64Array.from(bins, (c) => map.blockValue(b, c) / n));
  });
  let least: BlockSpread | null = null;
  for (let apart = 1; apart <= maps.length / 2; apart += 1) {
    let sum = 0;
    let squares = 0;
    for (let b = 0; b + apart < maps.length; b += 1) {
      const n = counts[b] as number;
      const other = counts[b + apart] as number;
      const shared = apart === 1 ? 1 / (3 * n * other) : 0;
      const scale = 1 / (varianceOf(n) + varianceOf(other) - shared);
      const here = maps[b] as Float64Array;
      const there = maps[b + apart] as Float64Array;
      for (let k = 0; k < weights.length; k += 1) {
        const term = scale * (weights[k] as number) * ((here[k] as number) - (there[k] as number)) ** 2;
        sum += term;
        squares += term * term;
      }
    }
    const count = (maps.length - apart) * weights.length;
    if (count < LEAST_SQUARES) continue;
    const ratio = sum / count;
    if (least !== null && ratio >= least.ratio) continue;
    least = { ratio, sigma: Math.sqrt(Math.max(squares / count - ratio * ratio, 0) / count), apart };
  }
  return least;
}

/** Of the mean of n differences of consecutive frames, where one alone in a long row adds 1. */
function varianceOf(n: number): number {
  return (n - 1 / 3) / (n * n);
}

/** Variance that the differences of neighbouring frames see over that of the pixels in the whole stack, 1 at most. */
function localShare(sums: FrameSums, differences: Float64Array): number {
  const { frames, masked } = sums;
  const count = differences.reduce((sum, n) => sum + n, 0);
  let spread = 0;
  sums.sum.forEach((total, i) => {
    if (masked[i] === 0) spread += (sums.sumSquares[i] as number) / frames - (total / frames) ** 2;
  });
  return spread > 0 && count > 0 ? Math.min(1, ownNoise(sums) / count / spread) : 0;
}

/** sum_i sum_k D_k(i)^2 / 2: lag 0 of the difference maps. */
function ownNoise({ width, height, blockWindow: window, blockMinus }: FrameSums): number {
  const centre = (height - 1 - window.y) * window.nx + (width - 1 - window.x);
  return blockMinus.reduce((sum, map) => sum + (map?.[centre] ?? 0), 0);
}

export interface CommonLight {
  /** Variance of the total of a frame, from differences of neighbours, over that of its pixels added up. */
  ratio: number;
  sigma: number;
}

/**
 * sum_ij G_ij / sum_i G_ii without the end frames. Alone, photons give 1; pairs at most 2, as a photon has one partner; read
 * noise and a noisy gain less. More is light, gain or a level that all pixels have in common from frame to frame. Standard error
 * from the variance of a variance, 1.5 * 2 / F. Of maps that are cut to a window only what is in it counts, so a
 * flicker may pass for less. Null where nothing varies. (Derived here.)
 */
export function commonLight(sums: FrameSums): CommonLight | null {
  const own = ownNoise(sums);
  if (!(own > 0)) return null;
  let all = 0;
  for (const map of sums.blockMinus) if (map !== null) for (const v of map) all += v;
  const ratio = all / own;
  return { ratio, sigma: Math.abs(ratio) * Math.sqrt(3 / sums.frames) };
}

function binsOf(map: FrameMap): number[] {
  const { blockWindow: window } = map;
  const open: number[] = [];
  for (let k = 0; k < window.nx * window.ny; k += 1) {
    const c = (window.y + Math.floor(k / window.nx)) * map.nx + window.x + (k % window.nx);
    if (map.blocked[c] === 0 && (map.variance[c] as number) > 0) open.push(c);
  }
  const step = Math.max(1, Math.ceil(open.length / MOST_BINS));
  return open.filter((_, k) => k % step === 0);
}
