import type { TagSpec } from '../../shared/contracts/tally';
import { ticksToPs } from '../../shared/units/ticks';
import { BYTES_PER_PAIR } from '../accumulators/pair-cache-store';
import { NO_WINDOW } from '../accumulators/tag-part';

/** Kept beyond the histogram and the windows to either side, as a share of what they span. */
const MARGIN = 1 / 8;
/** Kept delays are 32 bits wide. */
const MOST_TICKS = 2 ** 32;
/**
 * The pass that looks for the delay may keep this much, two pairs a record: beyond, keeping takes longer than reading
 * its million records again.
 */
const SEARCH_BYTES = 32 * 2 ** 20;

/** The same counting that keeps pairs beside, a little further than asked so that dials may be turned; or why not. */
export function keepingSpec(spec: TagSpec, limitBytes: number): TagSpec | { why: string } {
  const { loTick, hiTick } = hullOf(spec);
  const margin = Math.ceil((hiTick - loTick + 1) * MARGIN);
  const minTauTick = loTick - margin;
  const maxTauTick = hiTick + margin;
  if (maxTauTick - minTauTick >= MOST_TICKS) {
    const range = formatRange(minTauTick, maxTauTick, spec.tickFs);
    return {
      why: `Delays of ${range} are more than 2^32 ticks of the file; a shorter histogram lets its pairs be kept.`,
    };
  }
  return { ...spec, keepPairs: { minTauTick, maxTauTick, most: Math.floor(limitBytes / BYTES_PER_PAIR) } };
}

/** The search keeps exactly its own range, which is wide already. */
export function searchKeepingSpec(spec: TagSpec, limitBytes: number): TagSpec {
  const { loTick, hiTick } = hullOf(spec);
  const most = Math.floor(Math.min(limitBytes, SEARCH_BYTES) / BYTES_PER_PAIR);
  if (most === 0 || hiTick - loTick >= MOST_TICKS) return spec;
  return { ...spec, keepPairs: { minTauTick: loTick, maxTauTick: hiTick, most } };
}

export function tooManyPairs(
  { keepPairs, tickFs }: TagSpec,
  expectedBytes: number,
  limitBytes: number,
): string {
  const range = keepPairs ? ` within ${formatRange(keepPairs.minTauTick, keepPairs.maxTauTick, tickFs)}` : '';
  const need = Number.isFinite(expectedBytes) ? `about ${formatMiB(expectedBytes)}, ` : '';
  return `The pairs${range} take ${need}more than the ${formatMiB(limitBytes)} set for them, so only the windows asked for were counted; a shorter histogram or more memory lets them be kept.`;
}

function hullOf({ histogram, window }: TagSpec): { loTick: number; hiTick: number } {
  const { loTick, hiTick, shiftsTick } = window ?? NO_WINDOW;
  const centres = window === null ? [] : [0, ...shiftsTick];
  return {
    loTick: Math.min(histogram.loTick, ...centres.map((shift) => shift + loTick)),
    hiTick: Math.max(
      histogram.loTick + histogram.bins * histogram.binTick - 1,
      ...centres.map((shift) => shift + hiTick),
    ),
  };
}

function formatRange(loTick: number, hiTick: number, tickFs: number): string {
  const ns = (tick: number): string => String(Number((ticksToPs(tick, tickFs) / 1000).toPrecision(3)));
  return `${ns(loTick)} to ${ns(hiTick)} ns`;
}

function formatMiB(bytes: number): string {
  return `${Number((bytes / 2 ** 20).toPrecision(3))} MiB`;
}
