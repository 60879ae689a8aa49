import type { TagBlock } from '../../shared/contracts/blocks';
import type { RecordsLayout } from '../../shared/contracts/layout';

/** Tags as fixed-width little-endian records; `layout` says how to read them back. */
export interface RecordPacker {
  layout: RecordsLayout;
  pack(block: TagBlock): Uint8Array;
}

export function createRecordPacker(recordBytes: 4 | 8, tickFs: number): RecordPacker {
  return recordBytes === 4 ? createShortPacker(tickFs) : createLongPacker(tickFs);
}

const SHORT_TIME_BITS = 21;
const SHORT_PERIOD = 1 << SHORT_TIME_BITS;
const MARKER_BIT = 31;

/**
 * 4 bytes: time (21 bits), channel (10 bits), marker (1 bit). A marker record's time field holds how many periods of
 * 2^21 ticks have passed since the marker before it.
 */
function createShortPacker(tickFs: number): RecordPacker {
  let period = 0n;
  return {
    layout: {
      version: 1,
      format: 'records',
      kind: 'tags',
      recordBytes: 4,
      byteOrder: 'little',
      headerBytes: 0,
      time: { firstBit: 0, bits: SHORT_TIME_BITS },
      channel: { firstBit: SHORT_TIME_BITS, bits: 10 },
      rollover: {
        in: 'marker',
        when: [{ field: { firstBit: MARKER_BIT, bits: 1 }, equals: 1 }],
        advanceTick: SHORT_PERIOD,
        wraps: 'time-field',
      },
      skip: [],
      tickFs,
    },
    pack(block) {
      const words: number[] = [];
      for (let i = 0; i < block.count; i++) {
        const tick = block.baseTick + BigInt(block.deltaTick[i]!);
        const newPeriod = tick >> BigInt(SHORT_TIME_BITS);
        while (period < newPeriod) {
          const step = Math.min(Number(newPeriod - period), SHORT_PERIOD - 1);
          words.push(2 ** MARKER_BIT + step);
          period += BigInt(step);
        }
        const time = Number(tick & BigInt(SHORT_PERIOD - 1));
        words.push(block.channel[i]! * SHORT_PERIOD + time);
      }
      const bytes = new Uint8Array(words.length * 4);
      const view = new DataView(bytes.buffer);
      for (let i = 0; i < words.length; i++) view.setUint32(4 * i, words[i]!, true);
      return bytes;
    },
  };
}

/** 8 bytes: time (48 bits, wraps), channel (16 bits). */
function createLongPacker(tickFs: number): RecordPacker {
  return {
    layout: {
      version: 1,
      format: 'records',
      kind: 'tags',
      recordBytes: 8,
      byteOrder: 'little',
      headerBytes: 0,
      time: { firstBit: 0, bits: 48 },
      channel: { firstBit: 48, bits: 16 },
      rollover: { in: 'wrap' },
      skip: [],
      tickFs,
    },
    pack(block) {
      const bytes = new Uint8Array(block.count * 8);
      const view = new DataView(bytes.buffer);
      for (let i = 0; i < block.count; i++) {
        const tick = (block.baseTick + BigInt(block.deltaTick[i]!)) & 0xffffffffffffn;
        view.setBigUint64(8 * i, tick | (BigInt(block.channel[i]!) << 48n), true);
      }
      return bytes;
    },
  };
}
