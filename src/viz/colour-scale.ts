import { scaleLinear } from '@visx/scale';
import { decades, formatAmount, formatDecade } from './format-tick';
import type { Extremes } from './map-values';
import { SCALE_SIZE } from './palettes';

/** From values to places on a colour scale. */
export interface ColourScale {
  lo: number;
  hi: number;
  log: boolean;
  /** Data lie below or above the ends and are drawn at them. */
  clipsLow: boolean;
  clipsHigh: boolean;
}

/** Decades a logarithmic colour scale shows at most below its top. */
const LOG_DECADES = 6;

/**
 * Counts start at zero, the background; signed maps are centred on it. A logarithmic scale starts just below the smallest
 * value above zero (what is zero keeps the background); it is not offered for signed maps.
 */
export function buildColourScale(
  kind: 'counts' | 'signed',
  extremes: Extremes,
  range: readonly [number, number] | undefined,
  wantLog: boolean,
): ColourScale {
  const empty = extremes.maxIndex < 0;
  const log = wantLog && kind === 'counts' && Number.isFinite(extremes.minPositive);
  const largest = empty ? 1 : Math.max(Math.abs(extremes.min), Math.abs(extremes.max)) || 1;
  let [lo, hi] =
    range ?? (kind === 'signed' ? [-largest, largest] : [0, extremes.max > 0 ? extremes.max : 1]);
  if (kind === 'signed') {
    hi = Math.max(Math.abs(lo), Math.abs(hi));
    lo = -hi;
  }
  // Half the smallest value, so that one count still differs from none.
  if (log && lo <= 0) lo = Math.max(extremes.minPositive / 2, hi * 10 ** -LOG_DECADES);
  if (!(hi > lo)) hi = lo === 0 ? 1 : lo + Math.abs(lo);
  return {
    lo,
    hi,
    log,
    clipsLow: !empty && !log && extremes.min < lo,
    clipsHigh: !empty && extremes.max > hi,
  };
}

/** Place of a value on the palette, 0..SCALE_SIZE-1; the caller leaves NaN out. */
export function paletteIndex(scale: ColourScale, value: number): number {
  const share = scale.log
    ? Math.log(Math.max(value, scale.lo) / scale.lo) / Math.log(scale.hi / scale.lo)
    : (value - scale.lo) / (scale.hi - scale.lo);
  return Math.min(SCALE_SIZE - 1, Math.max(0, Math.round(share * (SCALE_SIZE - 1))));
}

export interface ColourTick {
  /** 0 at the low end, 1 at the high end. */
  share: number;
  label: string;
}

/** Inner ticks at round values; the two ends are always told, as they are what the picture was stretched to. */
export function colourTicks(scale: ColourScale, count: number): ColourTick[] {
  const { lo, hi, log } = scale;
  const shareOf = (v: number): number => (log ? Math.log(v / lo) / Math.log(hi / lo) : (v - lo) / (hi - lo));
  if (log) {
    const inner = decades(lo, hi);
    if (inner.length >= 2) return inner.map((v) => ({ share: shareOf(v), label: formatDecade(v) }));
  }
  const ticks = scaleLinear<number>({ domain: [lo, hi] }).ticks(count);
  const step = ticks.length > 1 ? ticks[1]! - ticks[0]! : hi - lo;
  return ticks.filter((v) => !log || v > 0).map((v) => ({ share: shareOf(v), label: formatAmount(v, step) }));
}
