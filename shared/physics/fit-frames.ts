import { blockInfluence, FIT_PARAMETERS, fitShape, type ShapeFit } from './fit-shape';
import {
  type CoarseCells,
  coarseCells,
  coarseSide,
  type MapRegion,
  shapeInBins,
  shapeInCells,
} from './frame-bins';
import type { FrameMap, FrameMapKind } from './frame-maps';
import { centreNode, type PeakShape, triangleNodes } from './gaussian-cells';

/**
 * Chi^2 fit of a two-dimensional Gaussian on a pedestal to a sum or difference map, averaged over the triangle law of two
 * pixels. The pedestal has the shape of `FrameMap.pedestal`. The peak follows an envelope: how many pairs of the array
 * can have this sum (difference), given the width of the other coordinate; where that width is not known, the plain
 * overlap, which leaves the width slightly too large and so on the safe side of a bound.
 */
export interface FramePeak {
  kind: FrameMapKind;
  fit: ShapeFit;
  /** Marginal variances with the two pixels' a^2/6 left in, pixel^2. */
  xx: number;
  yy: number;
  xy: number;
  mx: number;
  my: number;
  /** The fitted shape, bins; `fit` may be in coarser cells. */
  shape: PeakShape;
  /** Cut-out of the map that was fitted: first bin and size; and the model there. */
  region: MapRegion;
  readonly model: Float64Array;
  /** The cut-out reaches past the window that is known block by block: errors would come out too small. */
  uncovered: boolean;
  /** Share of the peak on bins that were left out (own pairs, crosstalk). */
  hidden: number;
  chi2: number;
  ndf: number;
  /** Whether the envelope of the other coordinate was used. */
  enveloped: boolean;
  /** blocks * FIT_PARAMETERS. */
  readonly influence: Float64Array;
}

export const DIFFERENCE_PIXEL_VARIANCE = 1 / 6;
const LEAST_VARIANCE = 0.02;
/** Fit window in standard deviations, and its least half width in bins. */
const REACH = 5;
const LEAST_REACH = 6;

/** Both peaks of one camera plane; the narrow one is fitted again with the envelope that the wide one gives. A peak is null
 * where nothing stands out of its map. */
export function fitFramePeaks(
  maps: Record<FrameMapKind, FrameMap>,
  narrow: FrameMapKind,
): Record<FrameMapKind, FramePeak | null> {
  const wide: FrameMapKind = narrow === 'plus' ? 'minus' : 'plus';
  const first = fitFramePeak(maps[narrow], FREE);
  if (first === null) return { plus: null, minus: null };
  const guide = fitFramePeak(maps[wide], { other: first, held: heldBy(maps, narrow, wide, first) });
  // The envelope only tilts the narrow peak by a few percent: its width need not be known well.
  const known =
    guide?.fit.converged === true &&
    blockSigma(guide.influence, 3) < guide.xx &&
    blockSigma(guide.influence, 5) < guide.yy;
  if (!known) return { plus: null, minus: null, [narrow]: first };
  const found = fitFramePeak(maps[narrow], { other: guide, held: null }) ?? first;
  const other = fitFramePeak(maps[wide], { other: found, held: heldBy(maps, narrow, wide, found) });
  return { plus: null, minus: null, [narrow]: found, [wide]: other };
}

/**
 * Both maps hold the same pairs, and a peak as wide as the array looks like its own pedestal: the wide fit takes
 * amplitude and pedestal, with their errors, from the narrow one.
 */
interface Held {
  amplitude: number;
  background: number;
  share(block: number): { amplitude: number; background: number };
}

interface Given {
  /** Peak of the other coordinate, for the envelope; null: the plain overlap. */
  other: FramePeak | null;
  /** Null: amplitude and pedestal are fitted. */
  held: Held | null;
}
const FREE: Given = { other: null, held: null };

function heldBy(
  maps: Record<FrameMapKind, FrameMap>,
  narrow: FrameMapKind,
  wide: FrameMapKind,
  peak: FramePeak,
): Held {
  // Pedestals are kept for the bin where they are highest.
  const ratio = mostOf(maps[wide].pedestal) / mostOf(maps[narrow].pedestal);
  return {
    amplitude: peak.fit.amplitude,
    background: peak.fit.background * ratio,
    share: (block) => ({
      amplitude: peak.influence[block * FIT_PARAMETERS] as number,
      background: ratio * (peak.influence[block * FIT_PARAMETERS + 6] as number),
    }),
  };
}

function mostOf(values: Float64Array): number {
  return values.reduce((a, b) => Math.max(a, b), Number.MIN_VALUE);
}

/** Standard error of the amplitude from the blocks; 0 where it was held. */
export function amplitudeSigma(peak: FramePeak): number {
  return blockSigma(peak.influence, 0);
}

/** Block standard error of parameter p: the bootstrap's limit for many resamples. */
export function blockSigma(influence: Float64Array, p: number): number {
  const blocks = influence.length / FIT_PARAMETERS;
  let mean = 0;
  for (let b = 0; b < blocks; b += 1) mean += (influence[b * FIT_PARAMETERS + p] as number) / blocks;
  let squares = 0;
  for (let b = 0; b < blocks; b += 1) squares += ((influence[b * FIT_PARAMETERS + p] as number) - mean) ** 2;
  return Math.sqrt(squares);
}

function fitFramePeak(map: FrameMap, given: Given): FramePeak | null {
  let start = findStart(map);
  if (start === null) return null;
  let peak: FramePeak | null = null;
  // The window follows the width; three rounds settle it from any of the starting boxes.
  for (let round = 0; round < 4; round += 1) {
    const next = fitWindow(map, given, start);
    if (next === null) return peak;
    const settled =
      peak !== null &&
      Math.abs(peak.region.nx - next.region.nx) <= 0.1 * next.region.nx &&
      Math.abs(peak.region.ny - next.region.ny) <= 0.1 * next.region.ny;
    peak = next;
    if (settled) break;
    start = { amplitude: next.fit.amplitude, shape: next.shape };
  }
  return peak;
}

interface Start {
  amplitude: number;
  shape: PeakShape;
}

/** Box of the largest signal-to-noise over a few sizes; difference maps are centred on zero. */
function findStart(map: FrameMap): Start | null {
  const value = integralOf(map, map.value);
  const noise = integralOf(map, map.variance);
  const copies = map.kind === 'minus' ? 2 : 1;
  let best = 3;
  let found: Start | null = null;
  const limit = Math.max(map.width, map.height) / 2;
  for (let half = 1; half <= limit; half *= 2) {
    const centres = map.kind === 'minus' ? [[map.width - 1, map.height - 1]] : gridOf(map, half);
    for (const [cx, cy] of centres as [number, number][]) {
      const signal = boxSum(value, map, cx, cy, half);
      const spread = Math.sqrt(copies * boxSum(noise, map, cx, cy, half));
      if (!(spread > 0) || !(signal / spread > best)) continue;
      best = signal / spread;
      const variance = Math.max((half / 1.5) ** 2, 0.3);
      const x = map.kind === 'minus' ? 0 : cx;
      const y = map.kind === 'minus' ? 0 : cy;
      found = { amplitude: signal, shape: { mx: x, my: y, xx: variance, xy: 0, yy: variance } };
    }
  }
  return found;
}

function gridOf(map: FrameMap, half: number): [number, number][] {
  const step = Math.max(1, Math.floor(half / 2));
  const out: [number, number][] = [];
  for (let y = 0; y < map.ny; y += step) for (let x = 0; x < map.nx; x += step) out.push([x, y]);
  return out;
}

/** Summed-area table of the bins that are not blocked, (ny+1)*(nx+1). */
function integralOf(map: FrameMap, values: Float64Array): Float64Array {
  const { nx, ny, blocked } = map;
  const out = new Float64Array((nx + 1) * (ny + 1));
  for (let y = 0; y < ny; y += 1) {
    let row = 0;
    for (let x = 0; x < nx; x += 1) {
      const c = y * nx + x;
      if (blocked[c] === 0) row += values[c] as number;
      out[(y + 1) * (nx + 1) + x + 1] = (out[y * (nx + 1) + x + 1] as number) + row;
    }
  }
  return out;
}

function boxSum(table: Float64Array, map: FrameMap, cx: number, cy: number, half: number): number {
  const x0 = Math.max(cx - half, 0);
  const y0 = Math.max(cy - half, 0);
  const x1 = Math.min(cx + half + 1, map.nx);
  const y1 = Math.min(cy + half + 1, map.ny);
  const at = (x: number, y: number): number => table[y * (map.nx + 1) + x] as number;
  return at(x1, y1) - at(x0, y1) - at(x1, y0) + at(x0, y0);
}

function fitWindow(map: FrameMap, given: Given, start: Start): FramePeak | null {
  const { other, held } = given;
  const minus = map.kind === 'minus';
  const origin = minus ? { x: map.width - 1, y: map.height - 1 } : { x: 0, y: 0 };
  const wanted = regionAround(map, origin, start.shape);
  const side = coarseSide(wanted, start.shape);
  const centre = { x: origin.x + Math.round(start.shape.mx), y: origin.y + Math.round(start.shape.my) };
  const cells = coarseCells(map, wanted, side, centre, origin);
  const { region } = cells;
  const area = side * side;
  const variance = cells.sum((bin) => map.variance[bin] as number);
  const use = Uint8Array.from(cells.open, (n, c) => (n > 0 && (variance[c] as number) > 0 ? 1 : 0));
  if (use.reduce((n, u) => n + u, 0) < 12) return null;
  const most = mostOf(map.pedestal);
  const envelopeAt = envelopeOf(map, other);
  // Three pixels wide and more, the triangle law only adds its variance; that is then in the fitted shape already.
  const broad = Math.min(start.shape.xx, start.shape.yy) > 9;
  const blur = broad ? 0 : DIFFERENCE_PIXEL_VARIANCE;
  const inCells = { amplitude: start.amplitude, shape: shapeInCells(start.shape, side) };
  const fit = fitShape({
    grid: cells.grid,
    nodes: broad ? centreNode : triangleNodes,
    data: cells.sum((bin) => map.value[bin] as number),
    use,
    // A density per cell is spread over its bins.
    envelope: cells.sum((bin) => envelopeAt(bin) / area),
    background: cells.sum((bin) => (map.pedestal[bin] as number) / most),
    backgroundAmplitude: held?.background ?? 0,
    freeAmplitude: held === null,
    freeBackground: held === null,
    freeCentre: !minus,
    variance,
    start: held === null ? inCells : { ...inCells, amplitude: held.amplitude },
    leastVariance: LEAST_VARIANCE,
  });
  const shape = shapeInBins(fit.shape, side);
  if (!Number.isFinite(fit.objective) || !(fit.amplitude > 0)) return null;
  const used = use.reduce((n, u) => n + u, 0);
  // Difference bins d and -d are copies: half of the chi^2 and half of the bins.
  const share = minus ? 0.5 : 1;
  const computeInfluence = (): Float64Array => {
    const influence = blockInfluence(
      fit,
      map.blocks,
      byBlock(use, (b) => cells.sum((bin) => map.blockValue(b, bin))),
      held === null ? () => ({ amplitude: 0, background: 0 }) : held.share,
    );
    scaleInfluence(influence, side);
    return influence;
  };
  let influence: Float64Array | null = null;
  let model: Float64Array | null = side === 1 ? fit.model : null;
  return {
    kind: map.kind,
    fit,
    xx: shape.xx + blur,
    yy: shape.yy + blur,
    xy: shape.xy,
    mx: shape.mx,
    my: shape.my,
    shape,
    region,
    get model() {
      model ??= fineModel(map, fit, region, origin, shape, envelopeAt);
      return model;
    },
    uncovered: reachesPast(region, map.blockWindow),
    hidden: hiddenShare(fit, cells, use),
    chi2: share * fit.objective,
    ndf: Math.max(Math.round(share * used) - fit.free.length, 0),
    enveloped: other !== null,
    // Costs more than the fit and is wanted of the last round alone.
    get influence() {
      influence ??= computeInfluence();
      return influence;
    },
  };
}

/** Cells of one block after the other: each block is summed once. */
function byBlock(
  use: Uint8Array,
  sumOf: (block: number) => Float64Array,
): (block: number, cell: number) => number {
  let current = -1;
  let values: Float64Array = new Float64Array(0);
  return (block, cell) => {
    if (block !== current) {
      values = sumOf(block);
      current = block;
    }
    return use[cell] === 1 ? (values[cell] as number) : 0;
  };
}

/** Influences on a fit in cells of `side` bins, brought to bins. */
function scaleInfluence(influence: Float64Array, side: number): void {
  const area = side * side;
  const scale = [1, side, side, area, area, area, 1];
  for (let k = 0; k < influence.length; k += 1) {
    influence[k] = (influence[k] as number) * (scale[k % FIT_PARAMETERS] as number);
  }
}

/** Model of every bin of the region, where the fit was in coarser cells. */
function fineModel(
  map: FrameMap,
  fit: ShapeFit,
  region: MapRegion,
  origin: { x: number; y: number },
  shape: PeakShape,
  envelopeAt: (bin: number) => number,
): Float64Array {
  const { mx, my, xx, xy, yy } = shape;
  const det = xx * yy - xy * xy;
  const norm = fit.amplitude / (2 * Math.PI * Math.sqrt(det));
  const most = mostOf(map.pedestal);
  return Float64Array.from({ length: region.nx * region.ny }, (_, c) => {
    const x = region.x + (c % region.nx);
    const y = region.y + Math.floor(c / region.nx);
    const u = x - origin.x - mx;
    const v = y - origin.y - my;
    const bin = y * map.nx + x;
    const bell = norm * Math.exp(-(yy * u * u - 2 * xy * u * v + xx * v * v) / (2 * det));
    return envelopeAt(bin) * bell + (fit.background * (map.pedestal[bin] as number)) / most;
  });
}

function regionAround(map: FrameMap, origin: { x: number; y: number }, shape: PeakShape): MapRegion {
  const halfX = Math.max(LEAST_REACH, Math.ceil(REACH * Math.sqrt(shape.xx)));
  const halfY = Math.max(LEAST_REACH, Math.ceil(REACH * Math.sqrt(shape.yy)));
  const cx = origin.x + Math.round(shape.mx);
  const cy = origin.y + Math.round(shape.my);
  const x = Math.min(Math.max(cx - halfX, 0), map.nx - 1);
  const y = Math.min(Math.max(cy - halfY, 0), map.ny - 1);
  return {
    x,
    y,
    nx: Math.max(Math.min(cx + halfX + 1, map.nx) - x, 1),
    ny: Math.max(Math.min(cy + halfY + 1, map.ny) - y, 1),
  };
}

function reachesPast(region: MapRegion, window: MapRegion): boolean {
  return (
    region.x < window.x ||
    region.y < window.y ||
    region.x + region.nx > window.x + window.nx ||
    region.y + region.ny > window.y + window.ny
  );
}

function hiddenShare(fit: ShapeFit, { side, open }: CoarseCells, use: Uint8Array): number {
  let all = 0;
  let hidden = 0;
  fit.bare.forEach((v, c) => {
    all += v;
    hidden += use[c] === 1 ? v * (1 - (open[c] as number) / (side * side)) : v;
  });
  return all > 0 ? hidden / all : 1;
}

/**
 * Share of the pairs with this sum (difference) that the array can hold. With the other coordinate Gaussian:
 * E(s) = 2 sum_i phi(s - 2i) per axis, E(d) = 2 sum_i phi(2i + d); own pairs are taken out, masked pixels thin it by
 * pairs / full pairs.
 */
function envelopeOf(map: FrameMap, other: FramePeak | null): (bin: number) => number {
  if (other === null) {
    const most = mostOf(map.pairs);
    return (bin) => (map.pairs[bin] as number) / most;
  }
  const ex = axisEnvelope(map.kind, map.width, other.mx, other.xx);
  const ey = axisEnvelope(map.kind, map.height, other.my, other.yy);
  const own = (2 / Math.sqrt(2 * Math.PI * other.xx)) * (2 / Math.sqrt(2 * Math.PI * other.yy));
  return (bin) => {
    const x = bin % map.nx;
    const y = Math.floor(bin / map.nx);
    const full = map.fullPairs[bin] as number;
    const removed = map.kind === 'plus' && x % 2 === 0 && y % 2 === 0 ? own : 0;
    const value = (ex[x] as number) * (ey[y] as number) - removed;
    return full > 0 ? Math.max((value * (map.pairs[bin] as number)) / full, 0) : 0;
  };
}

function axisEnvelope(kind: FrameMapKind, n: number, mean: number, variance: number): Float64Array {
  const norm = 2 / Math.sqrt(2 * Math.PI * variance);
  return Float64Array.from({ length: 2 * n - 1 }, (_, k) => {
    let sum = 0;
    const lag = kind === 'plus' ? k : k - (n - 1);
    for (let i = 0; i < n; i += 1) {
      const j = kind === 'plus' ? lag - i : i + lag;
      if (j < 0 || j >= n) continue;
      const u = (kind === 'plus' ? j - i : i + j) - mean;
      sum += norm * Math.exp((-u * u) / (2 * variance));
    }
    return sum;
  });
}
