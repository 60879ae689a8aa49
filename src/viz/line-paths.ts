import type { MapData } from '../../shared/contracts/output';
import { binCentre, type Span } from './axis-geometry';
import { isBlank } from './map-values';
import { monotoneSlopes } from './monotone';

/** Bins that touch the view, one more on either side so that lines run to the frame. */
export function visibleBins(map: MapData, view: Span): { from: number; to: number } {
  const axis = map.axes[0]!;
  const bins = map.shape[0] ?? 0;
  const a = (view[0] - axis.start) / (axis.step || 1);
  const b = (view[1] - axis.start) / (axis.step || 1);
  return {
    from: Math.max(0, Math.floor(Math.min(a, b)) - 1),
    to: Math.min(bins, Math.ceil(Math.max(a, b)) + 2),
  };
}

/** Range of values in view, error bars and model included; from zero for what is nowhere below zero. */
export function valueSpan(map: MapData, bins: { from: number; to: number }, log: boolean): Span {
  let [lo, hi, least] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
  const take = (value: number, isData = true): void => {
    if (!Number.isFinite(value)) return;
    if (value < lo) lo = value;
    if (value > hi) hi = value;
    // A model falls to 1e-300 in its wings; the foot of a logarithmic axis is where the data end.
    if (isData && value > 0 && value < least) least = value;
  };
  for (let i = bins.from; i < bins.to; i++) {
    if (map.model) take(map.model[i]!, false);
    if (isBlank(map, i)) continue;
    const [value, sigma] = [map.data[i]!, map.sigma?.[i] ?? 0];
    take(value);
    take(value + sigma);
    // An error bar that dips below zero does not make counts negative.
    if (value < 0) take(value - sigma);
  }
  if (!(hi >= lo)) return log ? [0.5, 10] : [0, 1];
  if (log) return Number.isFinite(least) ? [least * 0.7, Math.max(hi, least * 2) * 1.5] : [0.5, 10];
  const pad = (hi - Math.min(0, lo)) * 0.08 || 1;
  return [lo < 0 ? lo - pad : 0, hi + pad];
}

export interface Scales {
  x(at: number): number;
  /** Values that a logarithmic axis cannot show come out at its foot. */
  y(value: number): number;
}

const point = (x: number, y: number): string => `${x.toFixed(2)} ${y.toFixed(2)}`;

/** Calls `draw` for runs of bins that hold a value; a gap is left where one does not. */
function runs(map: MapData, { from, to }: { from: number; to: number }, values: Float64Array): number[][] {
  const found: number[][] = [];
  let run: number[] = [];
  for (let i = from; i < to; i++) {
    const blank = values === map.data ? isBlank(map, i) : !Number.isFinite(values[i]!);
    if (!blank) run.push(i);
    else if (run.length > 0) {
      found.push(run);
      run = [];
    }
  }
  if (run.length > 0) found.push(run);
  return found;
}

export function linePath(
  map: MapData,
  bins: { from: number; to: number },
  values: Float64Array,
  s: Scales,
): string {
  const axis = map.axes[0]!;
  return runs(map, bins, values)
    .map((run) => `M${run.map((i) => point(s.x(binCentre(axis, i)), s.y(values[i]!))).join('L')}`)
    .join('');
}

/** The model between its bins, drawn as the smooth curve it samples: cubic pieces that never overshoot. */
export function curvePath(
  map: MapData,
  bins: { from: number; to: number },
  values: Float64Array,
  s: Scales,
): string {
  const axis = map.axes[0]!;
  return runs(map, bins, values)
    .map((run) => {
      const xs = run.map((i) => s.x(binCentre(axis, i)));
      const ys = run.map((i) => s.y(values[i]!));
      const slopes = monotoneSlopes(xs, ys);
      const pieces = xs.slice(1).map((x, k) => {
        const third = (x - xs[k]!) / 3;
        const first = point(xs[k]! + third, ys[k]! + slopes[k]! * third);
        const second = point(x - third, ys[k + 1]! - slopes[k + 1]! * third);
        return `C${first} ${second} ${point(x, ys[k + 1]!)}`;
      });
      return `M${point(xs[0]!, ys[0]!)}${pieces.join('')}`;
    })
    .join('');
}

export function stepPath(map: MapData, bins: { from: number; to: number }, s: Scales): string {
  const axis = map.axes[0]!;
  const half = (axis.step || 1) / 2;
  return runs(map, bins, map.data)
    .map((run) => {
      const parts = run.map((i) => {
        const y = s.y(map.data[i]!).toFixed(2);
        return `${s.x(binCentre(axis, i) - half).toFixed(2)} ${y}H${s.x(binCentre(axis, i) + half).toFixed(2)}`;
      });
      return `M${parts.join('L')}`;
    })
    .join('');
}

/** Zero-length strokes: round line ends make them dots, one element for any number of points. */
export function dotPath(
  map: MapData,
  bins: { from: number; to: number },
  values: Float64Array,
  s: Scales,
): string {
  const axis = map.axes[0]!;
  return runs(map, bins, values)
    .flat()
    .map((i) => `M${point(s.x(binCentre(axis, i)), s.y(values[i]!))}h0`)
    .join('');
}

export function errorPath(map: MapData, bins: { from: number; to: number }, s: Scales): string {
  const { sigma } = map;
  if (!sigma) return '';
  const axis = map.axes[0]!;
  return runs(map, bins, map.data)
    .flat()
    .filter((i) => sigma[i]! > 0)
    .map((i) => {
      const x = s.x(binCentre(axis, i)).toFixed(2);
      const [low, high] = [s.y(map.data[i]! - sigma[i]!), s.y(map.data[i]! + sigma[i]!)];
      return `M${x} ${low.toFixed(2)}V${high.toFixed(2)}`;
    })
    .join('');
}

/** (data - model) / sigma per bin, NaN where one of them is missing; null without model or sigma. */
export function computeResiduals(map: MapData): Float64Array | null {
  const { model, sigma, data } = map;
  if (!model || !sigma) return null;
  return data.map((value, i) =>
    isBlank(map, i) || !(sigma[i]! > 0) ? Number.NaN : (value - model[i]!) / sigma[i]!,
  );
}
