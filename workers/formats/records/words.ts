import type { MaskTest, RecordPlan } from './plan';

/**
 * Bytes of whole records -> words, `stride` of them a record, least significant first. Little-endian records of 4, 8 and
 * 16 bytes are viewed in place when aligned. Typed arrays are little-endian on every platform the engine runs on.
 */
export function toRecordWords(
  bytes: Uint8Array,
  plan: Pick<RecordPlan, 'recordBytes' | 'stride' | 'bigEndian'>,
): Uint32Array {
  const { recordBytes, stride, bigEndian } = plan;
  const records = bytes.length / recordBytes;
  const aligned = bytes.byteOffset % 4 === 0 ? bytes : bytes.slice();
  if (recordBytes === 4 * stride) {
    const words = new Uint32Array(aligned.buffer, aligned.byteOffset, records * stride);
    return bigEndian ? swapRecords(words, stride) : words;
  }
  const words = new Uint32Array(records * stride);
  if (!bigEndian && recordBytes % 2 === 0) {
    const halves = new Uint16Array(aligned.buffer, aligned.byteOffset, bytes.length / 2);
    const wordHalves = new Uint16Array(words.buffer);
    for (let half = 0; half < recordBytes / 2; half += 1) {
      copyColumn(halves, half, recordBytes / 2, wordHalves, half, 2 * stride, records);
    }
    return words;
  }
  const wordBytes = new Uint8Array(words.buffer);
  for (let byte = 0; byte < recordBytes; byte += 1) {
    const target = bigEndian ? recordBytes - 1 - byte : byte;
    copyColumn(bytes, byte, recordBytes, wordBytes, target, 4 * stride, records);
  }
  return words;
}

/** Big-endian records of whole words: the words in reverse, and the bytes of each. */
function swapRecords(words: Uint32Array, stride: number): Uint32Array {
  const swapped = new Uint32Array(words.length);
  for (let k = 0; k < stride; k += 1) {
    for (let from = stride - 1 - k, to = k; to < words.length; from += stride, to += stride) {
      const word = words[from]!;
      swapped[to] = (word >>> 24) | ((word >>> 8) & 0xff00) | ((word & 0xff00) << 8) | (word << 24);
    }
  }
  return swapped;
}

function copyColumn(
  from: Uint8Array | Uint16Array,
  fromStart: number,
  fromStep: number,
  to: Uint8Array | Uint16Array,
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
  const dropped = new Uint8Array(words.length / stride);
  for (const test of plan.skip) markMatches(words, stride, test, dropped, 1);
  if (plan.rollover.in === 'marker') markMatches(words, stride, plan.rollover.when, dropped, 0);
  const kept = new Uint32Array(words.length);
  let to = 0;
  for (let i = 0, at = 0; i < dropped.length; i += 1, at += stride) {
    if (dropped[i] === 1) continue;
    for (let k = 0; k < stride; k += 1) kept[to + k] = words[at + k]!;
    to += stride;
  }
  return kept.subarray(0, to);
}

/** Writes `mark` for every record that matches. Records of up to two words are the common ones. */
function markMatches(
  words: Uint32Array,
  stride: number,
  test: MaskTest,
  into: Uint8Array,
  mark: 0 | 1,
): void {
  const lowMask = test.mask[0]!;
  const lowValue = test.value[0]!;
  const highMask = test.mask[1]!;
  const highValue = test.value[1]!;
  if (stride === 1) {
    for (let i = 0; i < into.length; i += 1) if ((words[i]! & lowMask) >>> 0 === lowValue) into[i] = mark;
  } else if (stride === 2) {
    for (let i = 0, at = 0; i < into.length; i += 1, at += 2) {
      if ((words[at]! & lowMask) >>> 0 !== lowValue) continue;
      if ((words[at + 1]! & highMask) >>> 0 === highValue) into[i] = mark;
    }
  } else {
    for (let i = 0; i < into.length; i += 1) if (matches(words, i * stride, stride, test)) into[i] = mark;
  }
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
