import type { BitField, RecordsLayout } from '../../../shared/contracts/layout';
import { Problem } from '../../../shared/errors/problem';

/**
 * A layout made ready for loops. A record is one integer of up to 128 bits held in 32-bit words, least significant
 * first; `stride` words a record.
 */
export interface RecordPlan {
  recordBytes: number;
  headerBytes: number;
  bigEndian: boolean;
  stride: 1 | 2 | 4;
  time: BitField;
  channel: BitField;
  rollover: RolloverPlan;
  skip: MaskTest[];
}

export type RolloverPlan =
  | { in: 'none' }
  /** Period 2^time.bits. */
  | { in: 'wrap' }
  | { in: 'marker'; when: MaskTest; advanceTick: number; counted: boolean };

/**
 * All conditions on a record at once: it matches when (word & mask) equals value for each of the four words. Joining
 * fields into masks keeps the test at one operation a word, however many conditions there are.
 */
export interface MaskTest {
  mask: Uint32Array;
  value: Uint32Array;
}

type Condition = RecordsLayout['skip'][number][number];

/** Checks the layout against itself and compiles it. Throws `bad-layout`. */
export function planRecords(layout: RecordsLayout): RecordPlan {
  assertFieldFits(layout.time, layout, 'time');
  assertFieldFits(layout.channel, layout, 'channel');
  const bytes = layout.recordBytes;
  return {
    recordBytes: bytes,
    headerBytes: layout.headerBytes,
    bigEndian: layout.byteOrder === 'big',
    stride: bytes <= 4 ? 1 : bytes <= 8 ? 2 : 4,
    time: layout.time,
    channel: layout.channel,
    rollover: planRollover(layout),
    skip: layout.skip.map((conditions) => joinConditions(conditions, layout, 'skip')),
  };
}

function planRollover(layout: RecordsLayout): RolloverPlan {
  const { rollover } = layout;
  if (rollover.in !== 'marker') return rollover;
  if (!Number.isSafeInteger(rollover.advanceTick)) {
    throw new Problem(
      'bad-layout',
      `A rollover must add a whole number of ticks below 2^53, found ${rollover.advanceTick}; correct it.`,
      'rollover.advanceTick',
    );
  }
  return {
    in: 'marker',
    when: joinConditions(rollover.when, layout, 'rollover.when'),
    advanceTick: rollover.advanceTick,
    counted: rollover.wraps === 'time-field',
  };
}

function assertFieldFits(field: BitField, layout: RecordsLayout, place: string): void {
  const lastBit = field.firstBit + field.bits - 1;
  const recordBits = 8 * layout.recordBytes;
  if (lastBit < recordBits) return;
  throw new Problem(
    'bad-layout',
    `Expected the ${place} field inside the ${recordBits} bits of a record, found bits ${field.firstBit} to ${lastBit}; move it or make the record longer.`,
    place,
  );
}

function joinConditions(conditions: readonly Condition[], layout: RecordsLayout, place: string): MaskTest {
  let mask = 0n;
  let value = 0n;
  for (const { field, equals } of conditions) {
    assertFieldFits(field, layout, place);
    const fieldMask = ((1n << BigInt(field.bits)) - 1n) << BigInt(field.firstBit);
    const fieldValue = BigInt(equals) << BigInt(field.firstBit);
    const clash = ((value ^ fieldValue) & mask & fieldMask) !== 0n;
    if (clash || (fieldValue & ~fieldMask) !== 0n) {
      throw new Problem(
        'bad-layout',
        `The condition "bits ${field.firstBit} to ${field.firstBit + field.bits - 1} equal ${equals}" can never hold; correct the value or the bits.`,
        place,
      );
    }
    mask |= fieldMask;
    value |= fieldValue;
  }
  return { mask: toWords(mask), value: toWords(value) };
}

function toWords(integer: bigint): Uint32Array {
  const word = (index: number): number => Number((integer >> BigInt(32 * index)) & 0xffffffffn);
  return Uint32Array.of(word(0), word(1), word(2), word(3));
}

/**
 * Records of a file of `size` bytes. Throws `empty-file` or `wrong-length`, naming the place where the odd bytes start.
 */
export function countRecords(plan: RecordPlan, size: number, name: string): number {
  if (size === 0) {
    throw new Problem(
      'empty-file',
      `${name} holds no bytes; choose the file that the acquisition wrote.`,
      name,
    );
  }
  const body = size - plan.headerBytes;
  if (body < 0) {
    throw new Problem(
      'wrong-length',
      `Expected a header of ${plan.headerBytes} bytes, but ${name} ends after ${size}; correct the header length.`,
      `${name}, byte ${size}`,
    );
  }
  const extra = body % plan.recordBytes;
  if (extra === 0) return body / plan.recordBytes;
  const records = (body - extra) / plan.recordBytes;
  throw new Problem(
    'wrong-length',
    `Expected whole records of ${plan.recordBytes} bytes after a header of ${plan.headerBytes}, found ${records} records and ${extra} bytes more; correct the record or header length, or copy the file again if it was cut (cutting it to ${size - extra} bytes keeps the whole records).`,
    `${name}, byte ${size - extra}`,
  );
}
