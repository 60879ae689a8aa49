import type { BitField } from '../../../shared/contracts/layout';
import { bitsOf, toRecordWords } from './words';

/** Records whose top bit marks a rollover: time and channel share the bits below it. */
export interface MarkerGuess {
  recordBytes: number;
  byteOrder: 'little' | 'big';
  time: BitField;
  channel: BitField;
  flag: BitField;
  /** `time-field`: the markers' time fields hold how many periods passed. */
  wraps: 'one' | 'time-field';
  records: number;
  markers: number;
  falls: number;
  channels: number;
  lastChannel: number;
}

const fewestMarkers = 4;

/**
 * The split under which the time field falls only across marked records, or null. That is a sharp test: one bit more or
 * less in the time field makes it fall elsewhere too. Cost O(splits x records).
 */
export function guessMarkers(sample: Uint8Array): MarkerGuess | null {
  let best: MarkerGuess | null = null;
  for (const recordBytes of [4, 8]) {
    const stride = recordBytes === 4 ? 1 : 2;
    const whole = sample.subarray(0, sample.length - (sample.length % recordBytes));
    for (const byteOrder of ['little', 'big'] as const) {
      const words = toRecordWords(whole, { recordBytes, stride, bigEndian: byteOrder === 'big' });
      for (const split of splitsOf(recordBytes)) {
        const found = judge(words, stride, split);
        if (found === null) continue;
        const guess = { ...split, ...found, recordBytes, byteOrder };
        // The right split has the fewest channels: wrong ones take time bits along.
        if (best === null || guess.channels < best.channels) best = guess;
      }
    }
  }
  return best;
}

interface MarkerSplit {
  time: BitField;
  channel: BitField;
  flag: BitField;
}

function splitsOf(recordBytes: number): MarkerSplit[] {
  const top = 8 * recordBytes - 1;
  const flag = { firstBit: top, bits: 1 };
  return Array.from({ length: 14 }, (_, k) => k + 3).flatMap((channelBits) => {
    const timeBits = top - channelBits;
    return [
      { flag, time: { firstBit: 0, bits: timeBits }, channel: { firstBit: timeBits, bits: channelBits } },
      { flag, time: { firstBit: channelBits, bits: timeBits }, channel: { firstBit: 0, bits: channelBits } },
    ];
  });
}

function judge(
  words: Uint32Array,
  stride: 1 | 2,
  { time, channel, flag }: MarkerSplit,
): Pick<MarkerGuess, 'wraps' | 'records' | 'markers' | 'falls' | 'channels' | 'lastChannel'> | null {
  const records = words.length / stride;
  const lowBits = Math.min(time.bits, 32);
  const seen = new Set<number>();
  let markers = 0;
  let groups = 0;
  let falls = 0;
  let fallsUnmarked = 0;
  let fewest = Number.POSITIVE_INFINITY;
  let most = 0;
  let isMarked = false;
  let previous = -1;
  for (let i = 0; i < records; i += 1) {
    const at = i * stride;
    const low = bitsOf(words, at, stride, time.firstBit, lowBits);
    const high = time.bits > 32 ? bitsOf(words, at, stride, time.firstBit + 32, time.bits - 32) : 0;
    const value = high * 2 ** 32 + low;
    if (bitsOf(words, at, stride, flag.firstBit, 1) === 1) {
      markers += 1;
      if (!isMarked) groups += 1;
      isMarked = true;
      fewest = Math.min(fewest, value);
      most = Math.max(most, value);
      continue;
    }
    if (value < previous) {
      falls += 1;
      if (!isMarked) fallsUnmarked += 1;
    }
    isMarked = false;
    previous = value;
    seen.add(bitsOf(words, at, stride, channel.firstBit, channel.bits));
  }
  const tags = records - markers;
  const isCredible =
    groups >= fewestMarkers &&
    markers < records / 2 &&
    falls >= groups * 0.4 &&
    fallsUnmarked <= falls * 0.02 &&
    seen.size <= Math.max(2, tags / 4);
  if (!isCredible) return null;
  // A count of periods is at least one, and small beside the field that holds it.
  const isCount = fewest >= 1 && most < 2 ** (time.bits - 4);
  return {
    wraps: isCount ? 'time-field' : 'one',
    records,
    markers,
    falls,
    channels: seen.size,
    lastChannel: Math.max(...seen),
  };
}
