import type { BitField, RecordsLayout } from '../../../shared/contracts/layout';
import { recordsLayoutSchema } from '../../../shared/contracts/layout';
import type { z } from '../../../shared/util/zod';

export function recordsLayout(parts: Partial<z.input<typeof recordsLayoutSchema>>): RecordsLayout {
  return recordsLayoutSchema.parse({
    version: 1,
    format: 'records',
    kind: 'tags',
    recordBytes: 8,
    byteOrder: 'little',
    headerBytes: 0,
    time: { firstBit: 0, bits: 48 },
    channel: { firstBit: 48, bits: 16 },
    rollover: { in: 'none' },
    tickFs: 1000,
    ...parts,
  });
}

/** Records as whole integers of BigInt: slow, and the reference for the decoders. */
export function writeRecords(layout: RecordsLayout, values: readonly bigint[]): Uint8Array {
  const { recordBytes, headerBytes, byteOrder } = layout;
  const bytes = new Uint8Array(headerBytes + values.length * recordBytes);
  values.forEach((value, index) => {
    for (let byte = 0; byte < recordBytes; byte += 1) {
      const at = byteOrder === 'little' ? byte : recordBytes - 1 - byte;
      bytes[headerBytes + index * recordBytes + at] = Number((value >> BigInt(8 * byte)) & 255n);
    }
  });
  return bytes;
}

export function place(value: bigint, { firstBit, bits }: BitField): bigint {
  return (value & ((1n << BigInt(bits)) - 1n)) << BigInt(firstBit);
}

export function field(value: bigint, { firstBit, bits }: BitField): bigint {
  return (value >> BigInt(firstBit)) & ((1n << BigInt(bits)) - 1n);
}

/** Tags as records of the layout; times are cut to the width of their field. */
export function writeTags(
  layout: RecordsLayout,
  ticks: readonly bigint[],
  channels: readonly number[],
): Uint8Array {
  return writeRecords(
    layout,
    ticks.map((tick, i) => place(tick, layout.time) | place(BigInt(channels[i]!), layout.channel)),
  );
}

/**
 * What the contract says about every record, in 64-bit integers one at a time: markers before skips, a wrap on a fall of
 * more than half the range.
 */
export function readReference(
  layout: RecordsLayout,
  values: readonly bigint[],
): { ticks: bigint[]; channels: number[] } {
  const { rollover, time, channel, skip } = layout;
  const ticks: bigint[] = [];
  const channels: number[] = [];
  let epoch = 0n;
  let previous: bigint | null = null;
  for (const value of values) {
    const raw = field(value, time);
    const holds = (conditions: (typeof skip)[number]): boolean =>
      conditions.every((each) => field(value, each.field) === BigInt(each.equals));
    if (rollover.in === 'marker' && holds(rollover.when)) {
      epoch += (rollover.wraps === 'one' ? 1n : raw) * BigInt(rollover.advanceTick);
      continue;
    }
    if (skip.some(holds)) continue;
    if (rollover.in === 'wrap' && previous !== null && previous - raw > 1n << BigInt(time.bits - 1)) {
      epoch += 1n << BigInt(time.bits);
    }
    previous = raw;
    ticks.push(epoch + raw);
    channels.push(Number(field(value, channel)));
  }
  return { ticks, channels };
}
