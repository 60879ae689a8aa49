import type { TextPlan } from './plan';

/** Where differences count from: `high * 10^9 + low` units of the text, and the same in ticks. */
export interface TextBase {
  tick: bigint;
  /** The same as a number where it is below 2^53, else NaN. */
  tickNumber: number;
  high: number;
  low: number;
}

/** Columns being filled, as long as lines may go into them, and how many did. */
export interface TextSink {
  deltaTick: Float64Array;
  channel: Uint16Array;
  count: number;
  lines: number;
}

export const lowUnit = 1e9;
/** Differences further from the base ask for a new one: sums of two stay exact in doubles. */
export const farthestDelta = 2 ** 52;
/** Whole numbers of so many digits are exact in doubles, and so is ten times them. */
const exactDigits = 15;

/**
 * Reads lines of plain digits (`1234567,8`, `0.001234 3`) from `from` on and answers where it stopped: at `to`, where the
 * sink has its lines, or before the first line that is anything else (blank, remark, quoted, signed, with an exponent, wrong,
 * too far from the base), which is then read with care. `to` must lie right after a line end. No allocation; cost
 * O(bytes).
 */
export function parseFast(
  bytes: Uint8Array,
  from: number,
  to: number,
  plan: TextPlan,
  base: TextBase,
  sink: TextSink,
): number {
  const { delimiter, mark, timeColumn, channelColumn } = plan;
  const { ticksPerUnit, tableNumerator, tableDenominator } = plan.scale;
  if (ticksPerUnit === 0) return from;
  const { deltaTick, channel } = sink;
  const tab = delimiter === -1 ? 9 : 32;
  // Blanks end a word only where they stand between columns.
  const blank = delimiter === -1 ? 32 : 10;
  const blankTab = delimiter === -1 ? 9 : 10;
  const lastColumn = Math.max(timeColumn, channelColumn);
  const baseHigh = base.high * lowUnit;
  const baseLow = base.low;
  // Lines without a tag take no room, so tags never run out of it.
  const most = deltaTick.length;
  let count = sink.count;
  let lines = sink.lines;
  let start = from;
  scan: while (start < to && lines < most) {
    let at = start;
    let byte = bytes[at]!;
    let delta = 0;
    let name = 0;
    for (let column = 0; ; column += 1) {
      while (byte === 32 || byte === tab) byte = bytes[++at]!;
      if (column === timeColumn) {
        const first = at;
        let value = 0;
        let digit = byte - 48;
        while (digit >= 0 && digit <= 9) {
          value = value * 10 + digit;
          byte = bytes[++at]!;
          digit = byte - 48;
        }
        const digits = at - first;
        if (digits === 0) break scan;
        delta = digits <= exactDigits ? value - baseLow - baseHigh : longDifference(bytes, first, at, base);
        delta *= ticksPerUnit;
        if (byte === mark) {
          const point = at;
          value = 0;
          byte = bytes[++at]!;
          digit = byte - 48;
          while (digit >= 0 && digit <= 9) {
            value = value * 10 + digit;
            byte = bytes[++at]!;
            digit = byte - 48;
          }
          const places = at - point - 1;
          if (places > exactDigits) break scan;
          const row = 40 - places;
          const double = 2 * value * tableNumerator[row]!;
          const parts = tableDenominator[row]!;
          if (!(double + 2 * parts < 2 ** 53)) break scan;
          delta += parts === 1 ? double / 2 : Math.floor((double + parts) / (2 * parts));
        }
        if (!(delta > -farthestDelta && delta < farthestDelta)) break scan;
      } else if (column === channelColumn) {
        const first = at;
        let digit = byte - 48;
        while (digit >= 0 && digit <= 9) {
          name = name * 10 + digit;
          byte = bytes[++at]!;
          digit = byte - 48;
        }
        if (at === first || name > 65535) break scan;
      } else {
        if (byte === 34 || (column === 0 && byte === 35)) break scan;
        while (byte !== delimiter && byte !== 10 && byte !== 13 && byte !== blank && byte !== blankTab)
          byte = bytes[++at]!;
      }
      const end = at;
      while (byte === 32 || byte === tab) byte = bytes[++at]!;
      const isEnd = byte === 10 || byte === 13;
      // Between columns stands a delimiter, or at least one blank.
      if (!(isEnd || byte === delimiter || (delimiter === -1 && at > end))) break scan;
      if (column === lastColumn) break;
      if (isEnd) break scan;
      if (delimiter !== -1) byte = bytes[++at]!;
    }
    while (byte !== 10 && byte !== 13) byte = bytes[++at]!;
    start = byte === 13 && bytes[at + 1] === 10 ? at + 2 : at + 1;
    deltaTick[count] = delta;
    channel[count] = name;
    count += 1;
    lines += 1;
  }
  sink.count = count;
  sink.lines = lines;
  return start;
}

/** Units from the base to the 16 to 24 digits at [first, end); far away for more. */
function longDifference(bytes: Uint8Array, first: number, end: number, base: TextBase): number {
  if (end - first > exactDigits + 9) return Number.POSITIVE_INFINITY;
  let high = 0;
  let low = 0;
  for (let at = first; at < end - 9; at += 1) high = high * 10 + bytes[at]! - 48;
  for (let at = end - 9; at < end; at += 1) low = low * 10 + bytes[at]! - 48;
  return (high - base.high) * lowUnit + (low - base.low);
}
