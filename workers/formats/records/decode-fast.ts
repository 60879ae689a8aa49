import type { BitField } from '../../../shared/contracts/layout';
import { compileGeneralDecode } from './decode-general';
import { type Decode, maxEpochTick } from './decode-state';
import type { MaskTest, RecordPlan } from './plan';

/**
 * A field of up to 53 bits of a two-word record as ((low >>> s0) & m0) + ((high >>> s1) & m1) * scale: no branch for
 * where the field lies.
 */
interface PairField {
  lowShift: number;
  lowMask: number;
  highShift: number;
  highMask: number;
  highScale: number;
}

function pairField({ firstBit, bits }: BitField): PairField {
  const lowBits = Math.max(0, Math.min(bits, 32 - firstBit));
  const highBits = bits - lowBits;
  return {
    lowShift: lowBits > 0 ? firstBit : 0,
    lowMask: 2 ** lowBits - 1,
    highShift: Math.max(0, firstBit - 32),
    highMask: 2 ** highBits - 1,
    highScale: 2 ** lowBits,
  };
}

/** The fast decoder where it applies (records of up to 8 bytes, time <= 52 bits, channel <= 16 bits), else the general. */
export function compileDecode(plan: RecordPlan): Decode {
  if (plan.stride === 4 || plan.time.bits > 52 || plan.channel.bits > 16) return compileGeneralDecode(plan);
  const time = pairField(plan.time);
  const channel = pairField(plan.channel);
  const { rollover, stride } = plan;
  if (rollover.in === 'none') return stride === 1 ? plainOne(time, channel) : plainTwo(time, channel);
  if (rollover.in === 'wrap') {
    const period = 2 ** plan.time.bits;
    return stride === 1 ? wrapOne(time, channel, period) : wrapTwo(time, channel, period);
  }
  const { when, advanceTick, counted } = rollover;
  return stride === 1
    ? markerOne(time, channel, when, advanceTick, counted)
    : markerTwo(time, channel, when, advanceTick, counted);
}

function plainOne(time: PairField, channel: PairField): Decode {
  const { lowShift: ts, lowMask: tm } = time;
  const { lowShift: cs, lowMask: cm } = channel;
  return (words, state, out) => {
    const { deltaTick, channel: channels } = out;
    let n = state.count;
    for (let i = state.next; i < words.length; i += 1) {
      const word = words[i]!;
      deltaTick[n] = ((word >>> ts) & tm) >>> 0;
      channels[n] = (word >>> cs) & cm;
      n += 1;
    }
    state.next = words.length;
    state.count = n;
  };
}

function plainTwo(time: PairField, channel: PairField): Decode {
  const { lowShift: t0, lowMask: m0, highShift: t1, highMask: m1, highScale } = time;
  const { lowShift: c0, lowMask: n0, highShift: c1, highMask: n1, highScale: channelScale } = channel;
  return (words, state, out) => {
    const { deltaTick, channel: channels } = out;
    const records = words.length >>> 1;
    let n = state.count;
    for (let i = state.next; i < records; i += 1) {
      const low = words[2 * i]!;
      const high = words[2 * i + 1]!;
      deltaTick[n] = (((low >>> t0) & m0) >>> 0) + (((high >>> t1) & m1) >>> 0) * highScale;
      channels[n] = ((low >>> c0) & n0) + ((high >>> c1) & n1) * channelScale;
      n += 1;
    }
    state.next = records;
    state.count = n;
  };
}

function wrapOne(time: PairField, channel: PairField, period: number): Decode {
  const { lowShift: ts, lowMask: tm } = time;
  const { lowShift: cs, lowMask: cm } = channel;
  const half = period / 2;
  return (words, state, out) => {
    const { deltaTick, channel: channels } = out;
    let epoch = state.epochTick;
    let previous = state.previousHigh < 0 ? -1 : state.previousLow;
    let n = state.count;
    let i = state.next;
    for (; i < words.length; i += 1) {
      const word = words[i]!;
      const raw = ((word >>> ts) & tm) >>> 0;
      if (previous - raw > half) {
        if (epoch + period > maxEpochTick) break;
        epoch += period;
      }
      previous = raw;
      deltaTick[n] = raw + epoch;
      channels[n] = (word >>> cs) & cm;
      n += 1;
    }
    state.next = i;
    state.count = n;
    state.epochTick = epoch;
    state.previousHigh = previous < 0 ? -1 : 0;
    state.previousLow = Math.max(0, previous);
  };
}

function wrapTwo(time: PairField, channel: PairField, period: number): Decode {
  const { lowShift: t0, lowMask: m0, highShift: t1, highMask: m1, highScale } = time;
  const { lowShift: c0, lowMask: n0, highShift: c1, highMask: n1, highScale: channelScale } = channel;
  const half = period / 2;
  return (words, state, out) => {
    const { deltaTick, channel: channels } = out;
    const records = words.length >>> 1;
    let epoch = state.epochTick;
    let previous = state.previousHigh < 0 ? -1 : state.previousHigh * 2 ** 32 + state.previousLow;
    let n = state.count;
    let i = state.next;
    for (; i < records; i += 1) {
      const low = words[2 * i]!;
      const high = words[2 * i + 1]!;
      const raw = (((low >>> t0) & m0) >>> 0) + (((high >>> t1) & m1) >>> 0) * highScale;
      if (previous - raw > half) {
        if (epoch + period > maxEpochTick) break;
        epoch += period;
      }
      previous = raw;
      deltaTick[n] = raw + epoch;
      channels[n] = ((low >>> c0) & n0) + ((high >>> c1) & n1) * channelScale;
      n += 1;
    }
    state.next = i;
    state.count = n;
    state.epochTick = epoch;
    state.previousHigh = previous < 0 ? -1 : Math.floor(previous / 2 ** 32);
    state.previousLow = previous < 0 ? 0 : previous % 2 ** 32;
  };
}

function markerOne(
  time: PairField,
  channel: PairField,
  when: MaskTest,
  advanceTick: number,
  counted: boolean,
): Decode {
  const { lowShift: ts, lowMask: tm } = time;
  const { lowShift: cs, lowMask: cm } = channel;
  const mask = when.mask[0]!;
  const value = when.value[0]!;
  return (words, state, out) => {
    const { deltaTick, channel: channels } = out;
    let epoch = state.epochTick;
    let n = state.count;
    let i = state.next;
    for (; i < words.length; i += 1) {
      const word = words[i]!;
      const raw = ((word >>> ts) & tm) >>> 0;
      if ((word & mask) >>> 0 === value) {
        const next = epoch + (counted ? raw : 1) * advanceTick;
        if (!(next <= maxEpochTick)) break;
        epoch = next;
        continue;
      }
      deltaTick[n] = raw + epoch;
      channels[n] = (word >>> cs) & cm;
      n += 1;
    }
    state.next = i;
    state.count = n;
    state.epochTick = epoch;
  };
}

function markerTwo(
  time: PairField,
  channel: PairField,
  when: MaskTest,
  advanceTick: number,
  counted: boolean,
): Decode {
  const { lowShift: t0, lowMask: m0, highShift: t1, highMask: m1, highScale } = time;
  const { lowShift: c0, lowMask: n0, highShift: c1, highMask: n1, highScale: channelScale } = channel;
  const maskLow = when.mask[0]!;
  const maskHigh = when.mask[1]!;
  const valueLow = when.value[0]!;
  const valueHigh = when.value[1]!;
  return (words, state, out) => {
    const { deltaTick, channel: channels } = out;
    const records = words.length >>> 1;
    let epoch = state.epochTick;
    let n = state.count;
    let i = state.next;
    for (; i < records; i += 1) {
      const low = words[2 * i]!;
      const high = words[2 * i + 1]!;
      const raw = (((low >>> t0) & m0) >>> 0) + (((high >>> t1) & m1) >>> 0) * highScale;
      if ((low & maskLow) >>> 0 === valueLow && (high & maskHigh) >>> 0 === valueHigh) {
        const next = epoch + (counted ? raw : 1) * advanceTick;
        if (!(next <= maxEpochTick)) break;
        epoch = next;
        continue;
      }
      deltaTick[n] = raw + epoch;
      channels[n] = ((low >>> c0) & n0) + ((high >>> c1) & n1) * channelScale;
      n += 1;
    }
    state.next = i;
    state.count = n;
    state.epochTick = epoch;
  };
}
