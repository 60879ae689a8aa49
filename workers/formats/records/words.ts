import type { MaskTest, RecordPlan } from './plan';

/**
 * Bytes of whole records -> words, `stride` of them a record, least significant first. Little-endian records of 4 and
 * 8 bytes are viewed in place when aligned. Typed arrays are little-endian on every platform the engine runs on.
 */
export function toRecordWords(
  bytes: Uint8Array,
  plan: Pick<RecordPlan, 'recordBytes' | 'stride' | 'bigEndian'>,
): Uint32Array {
  const { recordBytes, stride, bigEndian } = plan;
  const records = bytes.length / recordBytes;
  if (!bigEndian && recordBytes === 4 * stride) {
    const aligned = bytes.byteOffset % 4 === 0 ? bytes : bytes.slice();
    return new Uint32Array(aligned.buffer, aligned.byteOffset, records * stride);
  }
  const words = new Uint32Array(records * stride);
  const wordBytes = new Uint8Array(words.buffer);
  for (let byte = 0; byte < recordBytes; byte += 1) {
    const target = bigEndian ? recordBytes - 1 - byte : byte;
    copyByteColumn(bytes, byte, recordBytes, wordBytes, target, 4 * stride, records);
  }
  return words;
}

function copyByteColumn(
  from: Uint8Array,
  fromStart: number,
  fromStep: number,
  to: Uint8Array,
  toStart: number,
  toStep: number,
  count: number,
): void {
  for (let i = 0, f = fromStart, t = toStart; i < count; i += 1, f += fromStep, t += toStep) to[t] = from[f]!;
}

export function matches(words: Uint32Array, at: number, stride: number, test: MaskTest): boolean {
  for (let k = 0; k < stride; k += 1) {
    if ((words[at + k]! & test.mask[k]!) >>> 0 !== test.value[k]!) return false;
  }
  return true;
}

export function isSkipped(words: Uint32Array, at: number, plan: RecordPlan): boolean {
  const { stride, skip, rollover } = plan;
  if (rollover.in === 'marker' && matches(words, at, stride, rollover.when)) return false;
  return skip.some((test) => matches(words, at, stride, test));
}

/**
 * Moves the records that are not skipped to the front (a copy, the source may be shared) and answers them. Rollover
 * markers always stay: they are tested before `skip`.
 */
export function withoutSkipped(words: Uint32Array, plan: RecordPlan): Uint32Array {
  const { stride } = plan;
  if (plan.skip.length === 0) return words;
  const kept = new Uint32Array(words.length);
  let to = 0;
  for (let at = 0; at < words.length; at += stride) {
    if (isSkipped(words, at, plan)) continue;
    for (let k = 0; k < stride; k += 1) kept[to + k] = words[at + k]!;
    to += stride;
  }
  return kept.subarray(0, to);
}

/** Bits [firstBit, firstBit + bits) with bits <= 32, across word borders. */
export function bitsOf(
  words: Uint32Array,
  at: number,
  stride: number,
  firstBit: number,
  bits: number,
): number {
  const word = firstBit >>> 5;
  const shift = firstBit & 31;
  let value = words[at + word]! >>> shift;
  if (shift > 0 && word + 1 < stride) value |= words[at + word + 1]! << (32 - shift);
  return bits === 32 ? value >>> 0 : value & ((1 << bits) - 1);
}
