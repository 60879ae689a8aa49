import { Problem } from '../../shared/errors/problem';
import { type NumberType, viewNumbers, viewWordPairs } from './numbers';

/** Spread of the high words within one block: differences stay below 2^52. */
const maxHighSpan = 2 ** 20 - 1;

export interface Ticks {
  baseTick: bigint;
  deltaTick: Float64Array;
  /** Index after the last value taken: smaller than asked when a jump in time asks for another base. */
  end: number;
}

/**
 * Ticks [start, count) of a packed column of integers, or of floats known to be whole, as a 64-bit base and exact differences. Times of 64 bits are read
 * as pairs of words and never become BigInts one by one: that is sixty times slower.
 */
export function ticksOf(column: Uint8Array, number: NumberType, start: number): Ticks {
  if (number.bytes < 8 || number.family === 'float') {
    const deltaTick = new Float64Array(viewNumbers(column, number).subarray(start));
    return { baseTick: 0n, deltaTick, end: start + deltaTick.length };
  }
  const words = viewWordPairs(column);
  const highs =
    number.family === 'int' ? new Int32Array(words.buffer, words.byteOffset, words.length) : words;
  const { end, lowest } = spanOf(highs, start, words.length / 2);
  const deltaTick = new Float64Array(end - start);
  for (let i = start, at = 2 * start; i < end; i += 1, at += 2) {
    deltaTick[i - start] = (highs[at + 1]! - lowest) * 4294967296 + words[at]!;
  }
  return { baseTick: BigInt(lowest) << 32n, deltaTick, end };
}

function spanOf(
  highs: Uint32Array | Int32Array,
  start: number,
  count: number,
): { end: number; lowest: number } {
  let lowest = highs[2 * start + 1] ?? 0;
  let highest = lowest;
  for (let i = start; i < count; i += 1) {
    const high = highs[2 * i + 1]!;
    if (high < lowest) {
      if (highest - high > maxHighSpan) return { end: i, lowest };
      lowest = high;
    } else if (high > highest) {
      if (high - lowest > maxHighSpan) return { end: i, lowest };
      highest = high;
    }
  }
  return { end: count, lowest };
}

/** Channels of a packed column. Throws `wrong-type`, naming the record, when one is not within 0..65535. */
export function channelsOf(
  column: Uint8Array,
  number: NumberType,
  firstRecord: number,
  place: string,
): Uint16Array {
  if (number.bytes === 8 && number.family !== 'float') return channelsOfPairs(column, firstRecord, place);
  const values = viewNumbers(column, number);
  if (values instanceof Uint16Array) return values;
  if (values instanceof Uint8Array) return Uint16Array.from(values);
  const channels = new Uint16Array(values.length);
  for (let i = 0; i < values.length; i += 1) {
    const value = values[i]!;
    if (!(value >= 0 && value <= 65535)) throw outside(String(value), firstRecord + i, place);
    channels[i] = value;
  }
  return channels;
}

function channelsOfPairs(column: Uint8Array, firstRecord: number, place: string): Uint16Array {
  const words = viewWordPairs(column);
  const channels = new Uint16Array(words.length / 2);
  for (let i = 0; i < channels.length; i += 1) {
    const low = words[2 * i]!;
    const high = words[2 * i + 1]!;
    if (high !== 0 || low > 65535) {
      const signed = BigInt.asIntN(64, (BigInt(high) << 32n) + BigInt(low));
      throw outside(String(signed), firstRecord + i, place);
    }
    channels[i] = low;
  }
  return channels;
}

function outside(found: string, record: number, place: string): Problem {
  return new Problem(
    'wrong-type',
    `Expected channels from 0 to 65535, found ${found} at record ${record}; point to the dataset that holds channels.`,
    `${place}, record ${record}`,
  );
}
