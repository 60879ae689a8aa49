import type { MapData } from '../../shared/contracts/output';
import { displayUnit, formatPlain } from '../lib/format-number';
import { axisSpan, binCentre } from './axis-geometry';
import { formatPosition } from './format-tick';
import { computeExtremes, describeValue } from './map-values';

export function describeAt(map: MapData, at: number): string {
  const axis = map.axes[0]!;
  return `${axis.label} ${formatPosition(at, axis.step)} ${displayUnit(axis.unit)}`.trim();
}

/** What the cursor reads: position, value with its uncertainty, model, and how far apart they are. */
export function describeBin(map: MapData, bin: number, residuals: Float64Array | null): string {
  const place = `${describeAt(map, binCentre(map.axes[0]!, bin))} · ${describeValue(map, bin)}`;
  const model = map.model?.[bin];
  if (model === undefined || !Number.isFinite(model)) return place;
  const residual = residuals?.[bin];
  const apart =
    residual === undefined || Number.isNaN(residual)
      ? ''
      : ` (${residual >= 0 ? '+' : '\u2212'}${Math.abs(residual).toFixed(1)} σ)`;
  return `${place} · model ${formatPlain(model, 4)}${apart}`;
}

/** The plot in words. */
export function describeLine(map: MapData): string {
  const axis = map.axes[0]!;
  const bins = map.shape[0] ?? 0;
  const [lo, hi] = axisSpan(axis, bins);
  const head = `${map.label}. ${bins} bins, ${axis.label} from ${formatPlain(lo)} to ${formatPlain(hi)} ${displayUnit(axis.unit)}.`;
  const extremes = computeExtremes(map);
  if (extremes.maxIndex < 0) return `${head} No values yet.`;
  const peak = describeAt(map, binCentre(axis, extremes.maxIndex));
  const model = map.model ? ' A fitted model is drawn.' : '';
  return `${head} Largest: ${describeValue(map, extremes.maxIndex)} at ${peak}; smallest ${formatPlain(extremes.min)}.${model}`;
}
