import { Problem } from '../../../shared/errors/problem';
import { type Decode, type DecodeState, maxEpochTick, maxHighSpan } from './decode-state';
import type { RecordPlan } from './plan';
import { bitsOf, matches } from './words';

/**
 * Decodes any layout, one field at a time: records up to 16 bytes, fields up to 64 bits across word borders. About ten
 * times slower than the fast decoder and its reference in the tests.
 *
 * Wraps follow one rule: a fall of the time field by more than half its range is a wrap; a smaller one is a record out
 * of order.
 */
export function compileGeneralDecode(plan: RecordPlan): Decode {
  const { stride, rollover } = plan;
  const periodTick = 2 ** plan.time.bits;
  return (words, state, out) => {
    const records = words.length / stride;
    while (state.next < records) {
      const at = state.next * stride;
      const low = timeLow(words, at, plan);
      const high = timeHigh(words, at, plan);
      if (rollover.in === 'marker' && matches(words, at, stride, rollover.when)) {
        const wraps = rollover.counted ? high * 2 ** 32 + low : 1;
        if (!advance(state, wraps * rollover.advanceTick)) return;
        state.next += 1;
        continue;
      }
      if (rollover.in === 'wrap' && isWrap(state, high, low, plan.time.bits)) {
        if (!advance(state, periodTick)) return;
      }
      if (!(high >= state.baseHigh && high - state.baseHigh <= maxHighSpan)) return;
      out.deltaTick[state.count] = (high - state.baseHigh) * 2 ** 32 + low + state.epochTick;
      out.channel[state.count] = channelOf(words, at, plan);
      state.previousHigh = high;
      state.previousLow = low;
      state.count += 1;
      state.next += 1;
    }
  };
}

/**
 * Gives the block that follows a base near the record at `state.next`, after `compileGeneralDecode` or the fast decoder
 * stopped there. A rollover too large for a double is added here in 64-bit integers.
 */
export function rebase(words: Uint32Array, state: DecodeState, plan: RecordPlan): void {
  const { stride, rollover } = plan;
  const at = state.next * stride;
  const epochWasEmpty = state.epochTick === 0;
  state.offsetTick += BigInt(state.epochTick);
  state.epochTick = 0;
  state.count = 0;
  const low = timeLow(words, at, plan);
  const high = timeHigh(words, at, plan);
  if (rollover.in === 'marker' && matches(words, at, stride, rollover.when)) {
    if (!epochWasEmpty) return;
    const wraps = rollover.counted ? (BigInt(high) << 32n) + BigInt(low) : 1n;
    state.offsetTick += wraps * BigInt(rollover.advanceTick);
    state.next += 1;
    return;
  }
  if (rollover.in === 'wrap' && isWrap(state, high, low, plan.time.bits)) {
    state.offsetTick += 1n << BigInt(plan.time.bits);
    state.previousHigh = -1;
  }
  // A margin below, so that records a little out of order stay at or after the base.
  state.baseHigh = plan.time.bits > 52 ? Math.max(0, high - 1024) : 0;
}

/** Adds a rollover to the epoch, or answers false when the epoch would leave the exact range. */
function advance(state: DecodeState, stepTick: number): boolean {
  if (!(state.epochTick + stepTick <= maxEpochTick)) return false;
  state.epochTick += stepTick;
  // The fall has been counted: forget the previous time, in case the decoder stops before this record.
  state.previousHigh = -1;
  return true;
}

/** Whether the time field fell by more than 2^(bits - 1); exact for 64 bits because the words are compared. */
function isWrap(state: DecodeState, high: number, low: number, bits: number): boolean {
  if (state.previousHigh < 0) return false;
  let fallHigh = state.previousHigh - high;
  let fallLow = state.previousLow - low;
  if (fallLow < 0) {
    fallHigh -= 1;
    fallLow += 2 ** 32;
  }
  if (bits <= 32) return fallHigh === 0 && fallLow > 2 ** (bits - 1);
  const halfHigh = 2 ** (bits - 33);
  return fallHigh > halfHigh || (fallHigh === halfHigh && fallLow > 0);
}

export function timeLow(words: Uint32Array, at: number, plan: RecordPlan): number {
  return bitsOf(words, at, plan.stride, plan.time.firstBit, Math.min(plan.time.bits, 32));
}

export function timeHigh(words: Uint32Array, at: number, plan: RecordPlan): number {
  if (plan.time.bits <= 32) return 0;
  return bitsOf(words, at, plan.stride, plan.time.firstBit + 32, plan.time.bits - 32);
}

function channelOf(words: Uint32Array, at: number, plan: RecordPlan): number {
  const { firstBit, bits } = plan.channel;
  const low = bitsOf(words, at, plan.stride, firstBit, Math.min(bits, 32));
  const high = bits > 32 ? bitsOf(words, at, plan.stride, firstBit + 32, bits - 32) : 0;
  if (high === 0 && low <= 65535) return low;
  const found = (BigInt(high) << 32n) + BigInt(low);
  throw new Problem(
    'bad-layout',
    `Expected channels from 0 to 65535, found ${found}; choose other channel bits, or skip such records.`,
    'channel',
  );
}
