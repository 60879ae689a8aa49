import type { MapData } from '../../shared/contracts/output';
import { displayUnit, formatPlain, formatQuantity } from '../lib/format-number';
import { axisSpan, binAt, binCentre } from './axis-geometry';
import { formatPosition } from './format-tick';
import type { PlotPoint } from './types';

export interface Grid {
  nx: number;
  ny: number;
}

export function gridOf(map: MapData): Grid {
  return { ny: map.shape[0] ?? 0, nx: map.shape[1] ?? 0 };
}

/** A bin without a value: masked, or not a number. */
export function isBlank(map: MapData, index: number): boolean {
  return (map.masked?.[index] ?? 0) !== 0 || Number.isNaN(map.data[index] ?? Number.NaN);
}

export interface Extremes {
  min: number;
  max: number;
  /** Smallest value above zero; Infinity when there is none. */
  minPositive: number;
  maxIndex: number;
  blank: number;
}

/** One pass over the bins that hold a value. All blank: min Infinity, max -Infinity, maxIndex -1. */
export function computeExtremes(map: MapData): Extremes {
  const found: Extremes = {
    min: Number.POSITIVE_INFINITY,
    max: Number.NEGATIVE_INFINITY,
    minPositive: Number.POSITIVE_INFINITY,
    maxIndex: -1,
    blank: 0,
  };
  const { data, masked } = map;
  for (let i = 0; i < data.length; i++) {
    const value = data[i]!;
    if (Number.isNaN(value) || (masked !== undefined && masked[i] !== 0)) {
      found.blank++;
      continue;
    }
    if (!Number.isFinite(value)) continue;
    if (value < found.min) found.min = value;
    if (value > 0 && value < found.minPositive) found.minPositive = value;
    if (value > found.max) {
      found.max = value;
      found.maxIndex = i;
    }
  }
  return found;
}

export function describeValue(map: MapData, index: number): string {
  if ((map.masked?.[index] ?? 0) !== 0) return 'masked';
  if (isBlank(map, index)) return 'no value';
  return formatQuantity({ value: map.data[index]!, sigma: map.sigma?.[index] ?? null, unit: map.unit });
}

function describePosition(map: MapData, which: 0 | 1, at: number): string {
  const axis = map.axes[which]!;
  return `${axis.label} ${formatPosition(at, axis.step)} ${displayUnit(axis.unit)}`.trim();
}

/** What the cursor reads: position with units, value with its uncertainty. Null outside the map. */
export function describePoint(map: MapData, point: PlotPoint): string | null {
  const { nx, ny } = gridOf(map);
  const ix = binAt(map.axes[0]!, nx, point.x);
  const iy = binAt(map.axes[1]!, ny, point.y);
  if (ix === null || iy === null) return null;
  const place = `${describePosition(map, 0, point.x)} · ${describePosition(map, 1, point.y)}`;
  return `${place} · ${describeValue(map, iy * nx + ix)}`;
}

/** The map in words, for those who do not see it. */
export function describeMap(map: MapData, extremes: Extremes): string {
  const { nx, ny } = gridOf(map);
  const spans = map.axes.slice(0, 2).map((axis, i) => {
    const [lo, hi] = axisSpan(axis, i === 0 ? nx : ny);
    return `${axis.label} from ${formatPlain(lo)} to ${formatPlain(hi)} ${displayUnit(axis.unit)}`.trim();
  });
  const head = `${map.label}. ${nx} by ${ny} bins, ${spans.join(', ')}.`;
  if (extremes.maxIndex < 0) return `${head} No values yet.`;
  const ix = extremes.maxIndex % nx;
  const iy = (extremes.maxIndex - ix) / nx;
  const peak = { x: binCentre(map.axes[0]!, ix), y: binCentre(map.axes[1]!, iy) };
  const masked = extremes.blank > 0 ? ` ${extremes.blank} bins masked or without a value.` : '';
  return `${head} Largest: ${describePoint(map, peak)}; smallest ${formatPlain(extremes.min)}.${masked}`;
}
