import { scaleLinear, scaleLog } from '@visx/scale';
import { decades, formatDecade, tickFormatter } from './format-tick';
import type { BoundRulerProps } from './types';

export interface RulerAxis {
  log: boolean;
  domain: readonly [number, number];
  x(value: number): number;
  ticks: readonly number[];
  /** Unlabelled ticks between the decades. */
  minor: readonly number[];
  format(value: number): string;
}

/** Every number the ruler has to show. */
function numbersOf({ entries, bounds }: Pick<BoundRulerProps, 'entries' | 'bounds'>): number[] {
  const values = entries.flatMap((entry) => [entry.value, ...entry.interval]);
  return [...values, ...bounds.map((bound) => bound.value)].filter(Number.isFinite);
}

/** Whole decades around the numbers with a little room, two at least. */
function decadeDomain(numbers: readonly number[]): [number, number] {
  const lo = Math.floor(Math.log10(Math.min(...numbers) * 0.8));
  const hi = Math.ceil(Math.log10(Math.max(...numbers) * 1.6));
  return [10 ** lo, 10 ** Math.max(hi, lo + 2)];
}

/** One logarithmic axis; a linear one when a number is zero or less (an entropy may be), which a logarithm cannot hold. */
export function buildRulerAxis(
  props: Pick<BoundRulerProps, 'entries' | 'bounds'>,
  left: number,
  width: number,
): RulerAxis {
  const numbers = numbersOf(props);
  const range = [left, left + width];
  if (numbers.length > 0 && numbers.every((value) => value > 0)) {
    const domain = decadeDomain(numbers);
    const scale = scaleLog<number>({ domain, range });
    const ticks = decades(...domain);
    const minor = ticks.slice(0, -1).flatMap((decade) => [2, 3, 4, 5, 6, 7, 8, 9].map((k) => k * decade));
    return { log: true, domain, x: (value) => scale(value), ticks, minor, format: formatDecade };
  }
  const [lo, hi] = numbers.length > 0 ? [Math.min(...numbers), Math.max(...numbers)] : [0, 1];
  const pad = (hi - lo) * 0.15 || 1;
  const scale = scaleLinear<number>({ domain: [lo - pad, hi + pad], range, nice: true });
  const [from = lo, to = hi] = scale.domain();
  const ticks = scale.ticks(6);
  return {
    log: false,
    domain: [from, to],
    x: (value) => scale(value),
    ticks,
    minor: [],
    format: tickFormatter(ticks),
  };
}

interface RulerRoom {
  left: number;
  width: number;
  right: number;
}

/** The axis, shortened where a bound's label would run out of the plot at its right. Never below half the room. */
export function fitRulerAxis(
  props: Pick<BoundRulerProps, 'entries' | 'bounds'>,
  { left, width, right }: RulerRoom,
  sorted: readonly { value: number }[],
  labelWidths: readonly number[],
): RulerAxis {
  const whole = Math.max(1, width - left - right);
  const axis = buildRulerAxis(props, left, whole);
  const fits = sorted.map(({ value }, i) => {
    const share = (axis.x(value) - left) / whole;
    return share > 0 ? (width - left - labelWidths[i]!) / share : whole;
  });
  const length = Math.max(whole / 2, Math.min(whole, ...fits));
  return length === whole ? axis : buildRulerAxis(props, left, length);
}

/** A label beside its mark, where it crosses neither a bound nor the edge: at the right if it fits, else at the left. */
export function placeRulerLabel(
  mark: { from: number; to: number },
  width: number,
  walls: readonly number[],
): { x: number; anchor: 'start' | 'end' } {
  const crosses = (from: number, to: number): boolean => walls.some((wall) => wall > from && wall < to);
  const right = { x: mark.to, anchor: 'start' } as const;
  if (!crosses(mark.to, mark.to + width)) return right;
  const fitsLeft = mark.from - width >= 0 && !crosses(mark.from - width, mark.from);
  return fitsLeft ? { x: mark.from, anchor: 'end' } : right;
}
