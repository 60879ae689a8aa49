import { recordsLayoutSchema } from '../../../shared/contracts/layout';
import type { ByteSource } from '../../../shared/contracts/reader';
import { openReader } from '../../../workers/formats/registry';
import { createRecordDecoding } from '../../../workers/kernels/tag-decode';
import { nodeEnvironment } from '../../../workers/pipeline/hdf5-node';
import { loadBytes, type OpenKernel } from './adapter';
import { kernelsOf } from './kernels';

const bit = (firstBit: number, equals = 1, bits = 1) => ({ field: { firstBit, bits }, equals });
const layouts = {
  8: {
    recordBytes: 8,
    time: { firstBit: 0, bits: 48 },
    channel: { firstBit: 48, bits: 15 },
    rollover: { in: 'marker', when: [bit(63)], advanceTick: 2 ** 48, wraps: 'one' },
  },
  4: {
    recordBytes: 4,
    time: { firstBit: 0, bits: 25 },
    channel: { firstBit: 25, bits: 6 },
    rollover: { in: 'marker', when: [bit(31), bit(25, 63, 6)], advanceTick: 2 ** 25, wraps: 'time-field' },
    skip: [[bit(31)]],
  },
} as const;

/** The reader itself, from bytes in memory to blocks of tags. */
export const decode: OpenKernel = async (folder, [width]) => {
  const bytes = await loadBytes(folder, 'records.bin');
  const parts = layouts[width === '8' ? 8 : 4];
  const layout = recordsLayoutSchema.parse({
    version: 1,
    format: 'records',
    kind: 'tags',
    byteOrder: 'little',
    headerBytes: 0,
    tickFs: 1000,
    ...parts,
  });
  const source: ByteSource = {
    name: 'records.bin',
    size: bytes.length,
    ref: { name: 'records.bin', size: bytes.length },
    read: async (start, end) => bytes.subarray(start, end),
    close: async () => undefined,
  };
  const reader = await openReader(source, layout, {
    ...nodeEnvironment,
    records: createRecordDecoding(await kernelsOf('tags')),
  });
  let asked = 0;
  const blocks = () => reader.read({ start: 0, end: asked }, 0n, { cancelled: false });
  return {
    async work(items) {
      asked = items;
      for await (const block of blocks()) void block.bytes;
    },
    async answer() {
      let count = 0;
      let time = 0;
      let channel = 0;
      for await (const block of blocks()) {
        if (block.kind !== 'tags') throw new Error('Records were read as frames.');
        const base = Number(block.baseTick % 1000003n);
        for (let i = (997 - (count % 997)) % 997; i < block.count; i += 997) {
          time += (base + (block.deltaTick[i]! % 1000003)) % 1000003;
          channel += block.channel[i]!;
        }
        count += block.count;
      }
      return Float64Array.of(count, time, channel);
    },
  };
};
