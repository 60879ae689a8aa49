import type { DialSpec, DialValue, DialValues, Region } from '../../../shared/contracts/dial';
import type { Axis, MapData } from '../../../shared/contracts/output';
import type { PlotRegion } from '../../viz/types';

/** Between dials and the marks drawn on plots: the window on a delay histogram, regions on an image. */

const PS: Record<string, number> = { fs: 1e-3, ps: 1, ns: 1e3, us: 1e6, µs: 1e6, ms: 1e9, s: 1e12 };

/** Factor from one time unit to another; null when either is no time. */
export function timeFactor(from: string, to: string): number | null {
  const [a, b] = [PS[from], PS[to]];
  return a === undefined || b === undefined ? null : a / b;
}

type NumberDial = Extract<DialSpec, { type: 'number' | 'integer' }>;

function findNumberDial(specs: readonly DialSpec[], ids: readonly string[]): NumberDial | null {
  for (const id of ids) {
    const spec = specs.find((candidate) => candidate.id === id);
    if (spec?.type === 'number' || spec?.type === 'integer') return spec;
  }
  return null;
}

/** On the dial's own grid and inside its limits. */
export function settleOnDial(spec: NumberDial, value: number): number {
  const onGrid = spec.step > 0 ? Math.round(value / spec.step) * spec.step : value;
  const whole = spec.type === 'integer' ? Math.round(onGrid) : Number(onGrid.toPrecision(12));
  return Math.min(spec.max, Math.max(spec.min, whole));
}

export interface WindowMark {
  lo: number;
  hi: number;
  /** Dials for the window from `lo` to `hi` on the axis; null where the study has no such dials. */
  turn: ((lo: number, hi: number) => DialValues) | null;
}

function numberOf(value: DialValue | undefined, chosen: number | undefined): number | null {
  return typeof value === 'number' ? value : (chosen ?? null);
}

/** The coincidence window on a delay histogram; `part` is what follows "delay.histogram." in its id ("near"). */
export function findWindow(
  axis: Axis,
  part: string,
  specs: readonly DialSpec[],
  dials: DialValues,
  chosen: Record<string, number>,
): WindowMark | null {
  const ids = (name: string): string[] => (part === '' ? [name] : [`${name}.${part}`, name]);
  const pick = (name: string) => {
    const spec = findNumberDial(specs, ids(name));
    // A dial set by hand leads at once; what the study chose belongs to the last run.
    const byHand = ids(name).find((id) => typeof dials[id] === 'number');
    const id = byHand ?? ids(name).find((candidate) => candidate in chosen);
    const value = id === undefined ? null : numberOf(dials[id], chosen[id]);
    const factor = timeFactor(spec?.unit ?? 'ps', axis.unit);
    return { spec, value: value === null || factor === null ? null : value * factor, factor };
  };
  const [width, centre] = [pick('window'), pick('delay')];
  if (width.value === null || centre.value === null) return null;
  const turn =
    width.spec === null || centre.spec === null || width.factor === null || centre.factor === null
      ? null
      : (lo: number, hi: number): DialValues => ({
          [centre.spec!.id]: settleOnDial(centre.spec!, (lo + hi) / 2 / centre.factor!),
          [width.spec!.id]: settleOnDial(width.spec!, (hi - lo) / width.factor!),
        });
  return { lo: centre.value - width.value / 2, hi: centre.value + width.value / 2, turn };
}

/** Pixels, both ends included, as the rectangle drawn over them. */
export function regionToPlot(region: Region, map: MapData): PlotRegion {
  const [x, y] = [map.axes[0]!, map.axes[1]!];
  const edges = (axis: Axis, from: number, to: number): [number, number] => {
    const ends = [axis.start + (from - 0.5) * axis.step, axis.start + (to + 0.5) * axis.step];
    return [Math.min(...ends), Math.max(...ends)];
  };
  const [x0, x1] = edges(x, region.x0, region.x1);
  const [y0, y1] = edges(y, region.y0, region.y1);
  return { x0, y0, x1, y1 };
}

export function plotToRegion(region: PlotRegion, map: MapData): Region {
  const [ny = 1, nx = 1] = map.shape;
  const pixels = (axis: Axis, bins: number, lo: number, hi: number): [number, number] => {
    const half = Math.abs(axis.step) / 2;
    const ends = [lo + half, hi - half].map((at) => Math.round((at - axis.start) / axis.step));
    const clamp = (bin: number): number => Math.min(bins - 1, Math.max(0, bin));
    return [clamp(Math.min(...ends)), clamp(Math.max(...ends))];
  };
  const [x0, x1] = pixels(map.axes[0]!, nx, region.x0, region.x1);
  const [y0, y1] = pixels(map.axes[1]!, ny, region.y0, region.y1);
  return { x0, y0, x1, y1 };
}

export function isRegion(value: DialValue | undefined): value is Region {
  return typeof value === 'object' && value !== null;
}
