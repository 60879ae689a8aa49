import type { TagTally } from '../../shared/contracts/tally';
import { tickSpanToSeconds } from '../../shared/units/ticks';

/** With fewer tags a slice than this on average, empty slices come about by chance and are no gaps. */
export const GAP_TAGS = 20;
/** Fewer tags than this do not tell how long the run was. */
const LEAST_TAGS = 10;
/** Share of the live time that may lie in slices beside a gap, of which an unknown part is dead. */
const MOST_DOUBT = 0.1;

/** Live time of a run: from the first to the last tag, without slices that hold no tag of either arm. */
export interface SliceTimes {
  /** Live seconds of each slice: those at the ends are cut at the first and last tag, those in a gap have none. */
  seconds: Float64Array;
  /** Full length of a slice, and start of the first one after the first tag (not above zero). */
  lengthS: number;
  startS: number;
  liveS: number;
  /** Whether there are tags enough to tell a gap from chance, and how many slices lie in gaps. */
  gapsSeen: boolean;
  empty: number;
  /** False where rates would be over a time that is not known to a tenth. */
  known: boolean;
}

export function sliceTimes(tally: TagTally): SliceTimes {
  const { firstTick, lastTick, tickFs, slices } = tally;
  const seconds = new Float64Array(slices);
  const lengthS = (tally.sliceTick * tickFs) / 1e15;
  const none = { seconds, lengthS, startS: 0, liveS: 0, gapsSeen: false, empty: 0, known: false };
  if (firstTick === null || lastTick === null) return none;
  const length = BigInt(tally.sliceTick);
  const origin = BigInt(tally.firstSlice) * length;
  const tags = seconds.map((_, k) => tally.a.singlesPerSlice[k]! + tally.b.singlesPerSlice[k]!);
  const total = tags.reduce((sum, n) => sum + n, 0);
  const occupied = tags.filter((n) => n > 0).length;
  const gapsSeen = total >= GAP_TAGS * occupied;
  const inGap = (k: number): boolean => gapsSeen && tags[k] === 0;
  let liveS = 0;
  let empty = 0;
  let besideGapS = 0;
  for (let k = 0; k < slices; k++) {
    if (inGap(k)) {
      empty += 1;
      continue;
    }
    const start = origin + BigInt(k) * length;
    const from = start > firstTick ? start : firstTick;
    const to = start + length < lastTick ? start + length : lastTick;
    seconds[k] = to > from ? tickSpanToSeconds(to - from, tickFs) : 0;
    liveS += seconds[k]!;
    if (inGap(k - 1) || inGap(k + 1)) besideGapS += seconds[k]!;
  }
  return {
    seconds,
    lengthS,
    startS: -tickSpanToSeconds(firstTick - origin, tickFs),
    liveS,
    gapsSeen,
    empty,
    known: total >= LEAST_TAGS && liveS > 0 && besideGapS <= MOST_DOUBT * liveS,
  };
}
