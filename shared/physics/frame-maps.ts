/**
 * Sum and difference maps of a single camera, made ready for a fit: own pairs (i = j) taken out, pairs and noise per
 * bin known. Estimator G of consecutive frames; its variance for uncorrelated pixels, averaged with its transpose, is
 * 1.5 s_i^2 s_j^2 / F (derived here). Each sum bin holds every pair twice, difference bins d and -d are copies.
 */
export interface FrameSums {
  width: number;
  height: number;
  frames: number;
  masked: Uint8Array;
  sum: Float64Array;
  sumSquares: Float64Array;
  diagonal: Float64Array;
  plus: Float64Array;
  minus: Float64Array;
  blockTotals: Float64Array;
  /** Cut-out of the maps kept block by block, i = j taken out of `blockPlus`. */
  blockWindow: { x: number; y: number; nx: number; ny: number };
  blockPlus: readonly (Float32Array | null)[];
  blockMinus: readonly (Float32Array | null)[];
}

/** Sum- and difference-coordinate maps of an image with itself, (2H-1)*(2W-1). */
export type SelfMaps = (image: Float64Array) => { plus: Float64Array; minus: Float64Array };

export type FrameMapKind = 'plus' | 'minus';

export interface FrameMap {
  kind: FrameMapKind;
  /** Size of the map, and of the frame. */
  nx: number;
  ny: number;
  width: number;
  height: number;
  /** G summed over the pairs of each bin, i = j removed. counts^2 per frame. */
  value: Float64Array;
  /** Ordered pixel pairs per bin, i = j removed. */
  pairs: Float64Array;
  /** The same on an array without masked pixels. */
  fullPairs: Float64Array;
  /** Products of the mean light of both pixels, in the bins of `value`. */
  light: Float64Array;
  /** Shape of what lies under the peak, as `Pedestal` has it: `pairs` or `light`. */
  pedestal: Float64Array;
  /** Variance of `value` from counting noise. */
  variance: Float64Array;
  /** 1 where the bin is left out: overlap under 5 % of the largest, own pairs, neighbour crosstalk. */
  blocked: Uint8Array;
  blocks: number;
  /** Where `blockValue` is known. */
  blockWindow: FrameSums['blockWindow'];
  /** Share of block b in bin `cell`; blocks sum to `value` up to the end frames. 0 outside the window. */
  blockValue(block: number, cell: number): number;
}

/**
 * pairs: the same for all pairs of pixels, as slow drift leaves it. light: as the light of both pixels. Frames scaled to one
 * total have lost Cov(I_i, T) with the total T; where every photon has a partner as often as any other that is f_i f_j Var T, f
 * the shares of light (derived here, to first order).
 */
export type Pedestal = 'pairs' | 'light';

const LEAST_OVERLAP = 0.05;
const CONSECUTIVE_VARIANCE = 1.5;

/** @param crosstalk difference bins with |d| up to this many pixels are blocked (0: the own pairs alone). */
export function buildFrameMaps(
  sums: FrameSums,
  selfMaps: SelfMaps,
  crosstalk: number,
  pedestal: Pedestal = 'pairs',
): Record<FrameMapKind, FrameMap> {
  const { width, height, frames, masked } = sums;
  const open = Float64Array.from(masked, (m) => (m === 1 ? 0 : 1));
  const spread = variances(sums);
  const spreadSquared = spread.map((s) => s * s);
  const overlap = selfMaps(open);
  const noise = selfMaps(spread);
  const light = selfMaps(sums.sum);
  const lightSquared = sums.sum.map((s) => s * s);
  const size = { nx: 2 * width - 1, ny: 2 * height - 1, width, height };
  const blocks = sums.blockTotals.length;
  const per = 1 / Math.max(frames - 1, 1);
  const cells = size.nx * size.ny;
  const centre = (height - 1) * size.nx + width - 1;

  const plusPairs = overlap.plus.map((n, c) => Math.max(Math.round(n) - ownShare(c, size, open), 0));
  const plusFull = overlap.plus.map((_, c) => fullOverlap(c, size, 'plus'));
  const plusLight = light.plus.map((v, c) => Math.max(v - ownShare(c, size, lightSquared), 0));
  const plus: FrameMap = {
    kind: 'plus',
    ...size,
    value: sums.plus.map((v, c) => per * (v - ownShare(c, size, sums.diagonal))),
    pairs: plusPairs,
    fullPairs: plusFull,
    light: plusLight,
    pedestal: pedestal === 'light' ? plusLight : plusPairs,
    variance: noise.plus.map(
      (v, c) => 2 * CONSECUTIVE_VARIANCE * per * Math.max(v - ownShare(c, size, spreadSquared), 0),
    ),
    blocked: blockedBins(plusPairs),
    blocks,
    blockWindow: sums.blockWindow,
    blockValue: blockShare(sums.blockPlus, sums.blockWindow, size.nx, per),
  };

  const minusShare = blockShare(sums.blockMinus, sums.blockWindow, size.nx, per);
  const minusPairs = overlap.minus.map((n, c) => (c === centre ? 0 : Math.round(n)));
  const minusBlocked = blockedBins(minusPairs);
  for (let c = 0; c < cells; c += 1) {
    const dx = (c % size.nx) - (width - 1);
    const dy = Math.floor(c / size.nx) - (height - 1);
    if (dx * dx + dy * dy <= crosstalk * crosstalk) minusBlocked[c] = 1;
  }
  const minusLight = light.minus.map((v, c) => (c === centre ? 0 : Math.max(v, 0)));
  const minus: FrameMap = {
    kind: 'minus',
    ...size,
    value: sums.minus.map((v, c) => (c === centre ? 0 : per * v)),
    pairs: minusPairs,
    fullPairs: overlap.minus.map((_, c) => fullOverlap(c, size, 'minus')),
    light: minusLight,
    pedestal: pedestal === 'light' ? minusLight : minusPairs,
    variance: noise.minus.map((v) => CONSECUTIVE_VARIANCE * per * Math.max(v, 0)),
    blocked: minusBlocked,
    blocks,
    blockWindow: sums.blockWindow,
    blockValue: (b, c) => (c === centre ? 0 : minusShare(b, c)),
  };
  return { plus, minus };
}

function blockShare(
  maps: readonly (Float32Array | null)[],
  window: FrameSums['blockWindow'],
  nx: number,
  per: number,
): (block: number, cell: number) => number {
  return (block, cell) => {
    const map = maps[block] ?? null;
    const x = (cell % nx) - window.x;
    const y = Math.floor(cell / nx) - window.y;
    if (map === null || x < 0 || y < 0 || x >= window.nx || y >= window.ny) return 0;
    return per * (map[y * window.nx + x] as number);
  };
}

interface MapSize {
  nx: number;
  ny: number;
  width: number;
  height: number;
}

/** Value of the image at i with 2 i = s: own pairs sit on even sums only. */
function ownShare(cell: number, size: MapSize, image: Float64Array): number {
  const sx = cell % size.nx;
  const sy = Math.floor(cell / size.nx);
  if (sx % 2 === 1 || sy % 2 === 1) return 0;
  return image[(sy / 2) * size.width + sx / 2] as number;
}

function fullOverlap(cell: number, size: MapSize, kind: FrameMapKind): number {
  const x = cell % size.nx;
  const y = Math.floor(cell / size.nx);
  const nx = size.width - Math.abs(x - (size.width - 1));
  const ny = size.height - Math.abs(y - (size.height - 1));
  const own = kind === 'plus' ? x % 2 === 0 && y % 2 === 0 : x === size.width - 1 && y === size.height - 1;
  if (kind === 'minus' && own) return 0;
  return nx * ny - (own ? 1 : 0);
}

function blockedBins(pairs: Float64Array): Uint8Array {
  const most = pairs.reduce((a, b) => Math.max(a, b), 0);
  return Uint8Array.from(pairs, (n) => (n < LEAST_OVERLAP * most || n === 0 ? 1 : 0));
}

/** Variance of every pixel over frames, 0 where masked. */
function variances(sums: FrameSums): Float64Array {
  const { frames, masked } = sums;
  return sums.sum.map((total, i) => {
    if (masked[i] === 1 || frames < 2) return 0;
    const mean = total / frames;
    return Math.max(((sums.sumSquares[i] as number) / frames - mean * mean) * (frames / (frames - 1)), 0);
  });
}
