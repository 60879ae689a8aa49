import type { BitField } from '../../../shared/contracts/layout';
import type { RecordPlan } from './plan';
import { bitsOf, toRecordWords } from './words';

/** Where time and channel may lie in a record read as one integer. */
interface Split {
  recordBytes: number;
  time: BitField;
  channel: BitField;
  /** The remaining bits must be zero: the channel field of a wide word is read by its low 16 bits only. */
  restZero: boolean;
}

export interface Guess extends Split {
  byteOrder: 'little' | 'big';
  score: number;
  records: number;
  wraps: number;
  backward: number;
  channels: number;
  lastChannel: number;
}

function bothWays(recordBytes: number, timeBits: number, channelBits: number, restZero = false): Split[] {
  const usedChannel = Math.min(channelBits, 16);
  const field = (firstBit: number, bits: number): BitField => ({ firstBit, bits });
  return [
    { recordBytes, time: field(0, timeBits), channel: field(timeBits, usedChannel), restZero },
    { recordBytes, time: field(channelBits, timeBits), channel: field(0, usedChannel), restZero },
  ];
}

/** Common practice first: among equals the earlier one is proposed. */
const splits: readonly Split[] = [
  ...bothWays(8, 48, 16),
  ...bothWays(8, 56, 8),
  ...bothWays(8, 54, 10),
  ...bothWays(8, 52, 12),
  ...bothWays(8, 60, 4),
  ...bothWays(8, 32, 32, true),
  ...bothWays(10, 64, 16),
  ...bothWays(12, 64, 32, true),
  ...bothWays(16, 64, 64, true),
  ...bothWays(4, 24, 8),
  ...bothWays(4, 28, 4),
  ...bothWays(4, 26, 6),
  ...bothWays(4, 22, 10),
  ...bothWays(4, 20, 12),
  ...bothWays(4, 16, 16),
];

/** Fewer records than this say nothing about which bits rise. */
const fewestRecords = 16;
/** At least this share of steps must rise, stay or wrap; random bits reach 5/8. */
const leastOrdered = 0.9;

/**
 * The most credible reading of bytes as records: a time field that hardly ever falls beside a channel field of few
 * values. Null when none is credible. Looks at `sample`, the first bytes of a file of `size`; cost O(splits x records).
 */
export function guessRecords(sample: Uint8Array, size: number): Guess | null {
  let best: Guess | null = null;
  splits.forEach((split, order) => {
    for (const byteOrder of ['little', 'big'] as const) {
      const guess = judge(sample, size, split, byteOrder, order);
      if (guess !== null && (best === null || guess.score > best.score)) best = guess;
    }
  });
  return best;
}

function judge(
  sample: Uint8Array,
  size: number,
  split: Split,
  byteOrder: 'little' | 'big',
  order: number,
): Guess | null {
  const { recordBytes } = split;
  const records = Math.floor(sample.length / recordBytes);
  if (records < fewestRecords) return null;
  const stride = recordBytes <= 4 ? 1 : recordBytes <= 8 ? 2 : 4;
  const bigEndian = byteOrder === 'big';
  const words = toRecordWords(sample.subarray(0, records * recordBytes), {
    recordBytes,
    stride,
    bigEndian,
  } as const);
  if (split.restZero && !isRestZero(words, stride, split)) return null;
  const time = timeFacts(words, stride, records, split.time);
  const channel = channelFacts(words, stride, records, split.channel);
  const steps = records - 1;
  const ordered = 1 - time.backward / steps;
  const moves = time.rises >= Math.max(3, steps / 100);
  const few = channel.values <= Math.max(2, Math.min(4096, records / 4));
  if (ordered < leastOrdered || !moves || !few || time.wraps > steps / 8) return null;
  if (channel.isShifted || channel.isRising) return null;
  const score =
    ordered +
    (split.restZero ? 0.2 : 0) +
    (size % recordBytes === 0 ? 0.1 : 0) -
    (time.hasGap ? 0.3 : 0) -
    (channel.values === 1 ? 0.2 : 0.02 * Math.log2(channel.values)) -
    0.04 * Math.log2(1 + time.wraps) -
    // Two short records read as one long record look credible; the other way round never does.
    0.025 * recordBytes -
    0.0005 * order;
  return {
    ...split,
    byteOrder,
    score,
    records,
    wraps: time.wraps,
    backward: time.backward,
    channels: channel.values,
    lastChannel: channel.last,
  };
}

/** Doubles are enough here: above 2^53 they blur steps of a few ticks, which the share of ordered steps forgives. */
function timeFacts(
  words: Uint32Array,
  stride: RecordPlan['stride'],
  records: number,
  { firstBit, bits }: BitField,
): { rises: number; wraps: number; backward: number; hasGap: boolean } {
  const lowBits = Math.min(bits, 32);
  const half = 2 ** (bits - 1);
  let rises = 0;
  let wraps = 0;
  let backward = 0;
  let lowUnion = 0;
  let highUnion = 0;
  let previous = -1;
  for (let i = 0; i < records; i += 1) {
    const at = i * stride;
    const low = bitsOf(words, at, stride, firstBit, lowBits);
    const high = bits > 32 ? bitsOf(words, at, stride, firstBit + 32, bits - 32) : 0;
    const value = high * 2 ** 32 + low;
    lowUnion |= low;
    highUnion |= high;
    if (previous >= 0) {
      if (value > previous) rises += 1;
      else if (previous - value > half) wraps += 1;
      else if (value < previous) backward += 1;
    }
    previous = value;
  }
  return { rises, wraps, backward, hasGap: hasGap(lowUnion, highUnion) };
}

/** Bits that are never set below bits that are: true times use all, so channel bits were taken along or left out. */
function hasGap(lowUnion: number, highUnion: number): boolean {
  const union = (BigInt(highUnion >>> 0) << 32n) | BigInt(lowUnion >>> 0);
  return (union & (union + 1n)) !== 0n;
}

function channelFacts(
  words: Uint32Array,
  stride: RecordPlan['stride'],
  records: number,
  { firstBit, bits }: BitField,
): { values: number; last: number; isShifted: boolean; isRising: boolean } {
  const seen = new Set<number>();
  let union = 0;
  let last = 0;
  let falls = 0;
  let previous = 0;
  for (let i = 0; i < records; i += 1) {
    const value = bitsOf(words, i * stride, stride, firstBit, bits);
    if (value < previous) falls += 1;
    previous = value;
    seen.add(value);
    union |= value;
    last = Math.max(last, value);
  }
  // Only multiples of four or more: the channel lies higher up and other bits were taken along.
  return {
    values: seen.size,
    last,
    isShifted: seen.size > 1 && (union & 3) === 0,
    // The upper part of a time, not a channel.
    isRising: seen.size > 1 && falls === 0,
  };
}

function isRestZero(
  words: Uint32Array,
  stride: RecordPlan['stride'],
  { recordBytes, time, channel }: Split,
): boolean {
  const rest: BitField[] = [];
  const end = 8 * recordBytes;
  for (let bit = 0; bit < end; bit += 16) {
    const inTime = bit >= time.firstBit && bit < time.firstBit + time.bits;
    const inChannel = bit >= channel.firstBit && bit < channel.firstBit + channel.bits;
    if (!inTime && !inChannel) rest.push({ firstBit: bit, bits: 16 });
  }
  for (let at = 0; at < words.length; at += stride) {
    if (rest.some(({ firstBit, bits }) => bitsOf(words, at, stride, firstBit, bits) !== 0)) return false;
  }
  return true;
}
