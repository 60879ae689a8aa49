import type { RecordDecoder, RecordDecoding, RecordRules } from '../../../shared/contracts/reader';
import type { MaskTest, RecordPlan } from './plan';

/** The decoder for the plan, where there is one and it takes such records; null where the readable one serves. */
export function openDecoder(plan: RecordPlan, decoding: RecordDecoding | undefined): RecordDecoder | null {
  const rules = rulesOf(plan);
  return rules === null || decoding === undefined ? null : decoding.open(rules);
}

function rulesOf(plan: RecordPlan): RecordRules | null {
  const { recordBytes, bigEndian, time, channel, rollover } = plan;
  if (recordBytes > 8 || time.bits > 52 || channel.bits > 16) return null;
  const skip = plan.skip.map(wholeTest);
  const odd = rollover.in === 'marker' ? [wholeTest(rollover.when), ...skip] : skip;
  const common = { recordBytes, bigEndian, time, channel, odd };
  if (rollover.in === 'none') return { ...common, rollover: 'none', advanceTick: 0 };
  if (rollover.in === 'wrap') return { ...common, rollover: 'wrap', advanceTick: 2 ** time.bits };
  return {
    ...common,
    rollover: rollover.counted ? 'counted' : 'marker',
    advanceTick: rollover.advanceTick,
  };
}

function wholeTest({ mask, value }: MaskTest): { mask: bigint; value: bigint } {
  return { mask: joined(mask), value: joined(value) };
}

function joined(words: Uint32Array): bigint {
  return (BigInt(words[1]!) << 32n) | BigInt(words[0]!);
}
