import type { TagTally } from '../../shared/contracts/tally';
import { tickSpanToSeconds } from '../../shared/units/ticks';

/** Seconds from first to last tag; 0 with fewer than two. */
export function spanSeconds(tally: Pick<TagTally, 'firstTick' | 'lastTick' | 'tickFs'>): number {
  const { firstTick, lastTick, tickFs } = tally;
  return firstTick === null || lastTick === null ? 0 : tickSpanToSeconds(lastTick - firstTick, tickFs);
}

export interface SliceTimes {
  /** Seconds of each slice between the first and the last tag: the slices at the ends are cut. */
  seconds: Float64Array;
  /** Full length of a slice, and start of the first one after the first tag (not above zero). */
  lengthS: number;
  startS: number;
}

export function sliceTimes(tally: TagTally): SliceTimes {
  const { firstTick, lastTick, tickFs, slices } = tally;
  const seconds = new Float64Array(slices);
  const lengthS = (tally.sliceTick * tickFs) / 1e15;
  if (firstTick === null || lastTick === null) return { seconds, lengthS, startS: 0 };
  const length = BigInt(tally.sliceTick);
  const origin = BigInt(tally.firstSlice) * length;
  for (let k = 0; k < slices; k++) {
    const start = origin + BigInt(k) * length;
    const from = start > firstTick ? start : firstTick;
    const to = start + length < lastTick ? start + length : lastTick;
    seconds[k] = to > from ? tickSpanToSeconds(to - from, tickFs) : 0;
  }
  return { seconds, lengthS, startS: -tickSpanToSeconds(firstTick - origin, tickFs) };
}
