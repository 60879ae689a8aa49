/** Speed of every reader: `npx tsx tests/bench/read-speed.ts`. CPU time of the process, median of five: other work on the
 * machine disturbs it little. */
import { rm } from 'node:fs/promises';
import type { Layout } from '../../shared/contracts/layout';
import type { ByteSource, Reader } from '../../shared/contracts/reader';
import { openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { writeHdf5 } from '../formats/support/hdf5-writer';
import { recordsLayout } from '../formats/support/record-writer';
import { fileSource, makeFolder, memorySource, never } from '../formats/support/sources';

const records = 2 ** 22;

async function measure(
  name: string,
  unit: string,
  amount: number,
  open: () => Promise<Reader>,
): Promise<void> {
  const reader = await open();
  const { facts } = reader;
  const end = facts.kind === 'tags' ? facts.records : facts.frames;
  const seconds: number[] = [];
  for (let run = 0; run < 5; run += 1) {
    const start = process.cpuUsage();
    for await (const block of reader.read({ start: 0, end }, 0n, never)) void block.bytes;
    const { user, system } = process.cpuUsage(start);
    seconds.push((user + system) / 1e6);
  }
  await reader.close();
  const median = seconds.sort((a, b) => a - b)[2]!;
  console.log(
    `${name.padEnd(40)} ${(amount / median / 1e6).toFixed(1).padStart(8)} M ${unit} per CPU second`,
  );
}

/** Bytes that are read without copying, so that decoding alone is measured. */
function inPlace(bytes: Uint8Array): ByteSource {
  return {
    ...memorySource(new Uint8Array(1)),
    size: bytes.length,
    read: async (start, end) => bytes.subarray(start, end),
  };
}

const bits = (firstBit: number, count: number): { firstBit: number; bits: number } => ({
  firstBit,
  bits: count,
});
const layouts: [string, Layout & { format: 'records' }][] = [
  ['8 bytes, 48 + 16', recordsLayout({})],
  ['8 bytes, 48 + 16, wrap', recordsLayout({ rollover: { in: 'wrap' } })],
  ['8 bytes, big-endian', recordsLayout({ byteOrder: 'big' })],
  ['8 bytes, skip', recordsLayout({ skip: [[{ field: bits(60, 4), equals: 15 }]] })],
  [
    '4 bytes, 24 + 8, wrap',
    recordsLayout({ recordBytes: 4, time: bits(0, 24), channel: bits(24, 8), rollover: { in: 'wrap' } }),
  ],
  [
    '4 bytes, 25 + 6, marker',
    recordsLayout({
      recordBytes: 4,
      time: bits(0, 25),
      channel: bits(25, 6),
      rollover: {
        in: 'marker',
        when: [{ field: bits(31, 1), equals: 1 }],
        advanceTick: 2 ** 25,
        wraps: 'one',
      },
    }),
  ],
  ['10 bytes, 64 + 16', recordsLayout({ recordBytes: 10, time: bits(0, 64), channel: bits(64, 16) })],
  ['16 bytes, 64 + 16', recordsLayout({ recordBytes: 16, time: bits(0, 64), channel: bits(64, 16) })],
];

for (const [name, layout] of layouts) {
  const bytes = new Uint8Array(records * layout.recordBytes);
  const view = new DataView(bytes.buffer);
  for (let i = 0; i < records; i += 1)
    view.setUint32(i * layout.recordBytes, i * 1000, layout.byteOrder === 'little');
  await measure(`records: ${name}`, 'records', records, () =>
    openReader(inPlace(bytes), layout, nodeEnvironment),
  );
}

const folder = await makeFolder();
const times = BigUint64Array.from({ length: records }, (_, i) => BigInt(i) * 250_000n);
const channels = Uint16Array.from({ length: records }, (_, i) => i % 512);
const tags: Layout = {
  version: 1,
  format: 'hdf5',
  kind: 'tags',
  time: { dataset: 't' },
  channel: { dataset: 'c' },
  tickFs: 1000,
};
const stackShape = [1024, 256, 256];
const stack = Uint16Array.from({ length: 1024 * 65536 }, (_, i) => (i * 7919) % 250);
const frames: Layout = { version: 1, format: 'hdf5', kind: 'frames', dataset: 'f' };
for (const gzip of [false, true]) {
  const how = gzip ? 'gzip chunks' : 'contiguous';
  const path = await writeHdf5(folder.path('tags'), [
    { name: 't', data: times, ...(gzip ? { gzip, chunks: [2 ** 16] } : {}) },
    { name: 'c', data: channels, ...(gzip ? { gzip, chunks: [2 ** 16] } : {}) },
  ]);
  await measure(`HDF5 uint64 + uint16, ${how}`, 'tags', records, async () =>
    openReader(await fileSource(path), tags, nodeEnvironment),
  );
  const stackPath = await writeHdf5(folder.path('frames'), [
    { name: 'f', data: stack, shape: stackShape, ...(gzip ? { gzip, chunks: [16, 256, 256] } : {}) },
  ]);
  await measure(`HDF5 uint16 frames, ${how}`, 'bytes', stack.byteLength, async () =>
    openReader(await fileSource(stackPath), frames, nodeEnvironment),
  );
  await rm(stackPath);
}
const table: Layout = { ...tags, time: { dataset: 'e', field: 't' }, channel: { dataset: 'e', field: 'c' } };
const rows = await writeHdf5(folder.path('rows'), [
  {
    name: 'e',
    dtype: [
      ['t', '<Q'],
      ['c', '<H'],
    ],
    data: new Map<string, BigUint64Array | Uint16Array>([
      ['t', times],
      ['c', channels],
    ]),
  },
]);
await measure('HDF5 compound of 10 bytes', 'tags', records, async () =>
  openReader(await fileSource(rows), table, nodeEnvironment),
);
await folder.remove();
