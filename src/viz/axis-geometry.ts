import type { Axis } from '../../shared/contracts/output';
import { displayUnit } from '../lib/format-number';

export type Span = readonly [lo: number, hi: number];

/** Outer edges of the first and last bin, in rising order whichever way the axis runs. */
export function axisSpan(axis: Axis, bins: number): Span {
  const half = (axis.step || 1) / 2;
  const first = axis.start - half;
  const last = axis.start + (bins - 1) * (axis.step || 1) + half;
  return first < last ? [first, last] : [last, first];
}

export function binCentre(axis: Axis, bin: number): number {
  return axis.start + bin * (axis.step || 1);
}

/** The bin a position falls in, or null outside the axis. */
export function binAt(axis: Axis, bins: number, at: number): number | null {
  // floor, not round: round gives -0 just below zero.
  const bin = Math.floor((at - axis.start) / (axis.step || 1) + 0.5);
  return bin >= 0 && bin < bins ? bin : null;
}

/** The nearest bin, for dragging beyond the edge. */
export function nearestBin(axis: Axis, bins: number, at: number): number {
  return Math.min(bins - 1, Math.max(0, Math.round((at - axis.start) / (axis.step || 1))));
}

/** "x signal (µm)"; no bracket for pure numbers. */
export function axisTitle(axis: Pick<Axis, 'label' | 'unit'>): string {
  const unit = displayUnit(axis.unit);
  return unit === '' ? axis.label : `${axis.label} (${unit})`;
}

export function zoomSpan([lo, hi]: Span, about: number, factor: number, full: Span, smallest: number): Span {
  const width = Math.min(full[1] - full[0], Math.max(smallest, (hi - lo) * factor));
  const from = about - ((about - lo) / (hi - lo)) * width;
  return shiftInside([from, from + width], 0, full);
}

/** Moves a span and keeps it inside the full one. */
export function shiftInside([lo, hi]: Span, by: number, full: Span): Span {
  const width = hi - lo;
  const from = Math.min(full[1] - width, Math.max(full[0], lo + by));
  return [from, from + width];
}
