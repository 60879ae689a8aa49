import { statSync } from 'node:fs';
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { layoutSchema } from '../../shared/contracts/layout';
import { openClassicTree } from '../../workers/formats/hdf5/classic-tree';
import { openLibraryTree } from '../../workers/formats/hdf5/library-tree';
import { readSuperblock } from '../../workers/formats/hdf5/superblock';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import {
  channels,
  count,
  framesLayout,
  inspect,
  makeHdf5Folder,
  tagsLayout,
  ticks,
} from './support/hdf5-files';
import type { DatasetToWrite, writeHdf5 } from './support/hdf5-writer';
import { fileSource, openFile, problemOf, readPixels, readTags } from './support/sources';

fc.configureGlobal({ seed: 1 });

let folder: Awaited<ReturnType<typeof makeHdf5Folder>>;
const write: (typeof folder)['write'] = (...given) => folder.write(...given);
beforeAll(async () => {
  folder = await makeHdf5Folder();
});
afterAll(() => folder.remove());

const expected = { ticks, channels };

describe('time tags of HDF5', () => {
  it('are two datasets, chunked or not, exact to the last tick', async () => {
    const path = await write([
      { name: 'beam/photon_times', data: BigUint64Array.from(ticks) },
      { name: 'beam/photon_pixels', data: Uint16Array.from(channels), chunks: [700], gzip: true },
    ]);
    const reader = await openFile(
      path,
      tagsLayout({ dataset: 'beam/photon_times' }, { dataset: '/beam/photon_pixels' }),
    );
    expect(reader.facts).toEqual({ kind: 'tags', records: count, tickFs: 1000, reader: 'h5wasm' });
    expect(await readTags(reader)).toEqual(expected);
    await fc.assert(
      fc.asyncProperty(fc.array(fc.nat({ max: count }), { maxLength: 4 }), async (cuts) => {
        expect(await readTags(reader, cuts)).toEqual(expected);
      }),
      { numRuns: 15 },
    );
    await reader.close();
  });

  it('are members of a compound dataset, at any offset', async () => {
    const path = await write([
      {
        name: 'events',
        dtype: [
          ['flag', '<B'],
          ['when', '<q'],
          ['who', '<I'],
        ],
        data: new Map<string, GuessableColumn>([
          ['flag', new Uint8Array(count)],
          ['when', BigInt64Array.from(ticks)],
          ['who', Uint32Array.from(channels)],
        ]),
      },
    ]);
    const layout = tagsLayout({ dataset: '/events', field: 'when' }, { dataset: '/events', field: 'who' });
    const reader = await openFile(path, layout);
    expect(await readTags(reader, [1000])).toEqual(expected);
    await reader.close();
    expect((await inspect(path)).layout).toEqual(layout);
  });

  it('are columns of a table, negative times included', async () => {
    const shifted = ticks.map((tick) => tick - 2n ** 53n);
    const table = BigInt64Array.from(shifted.flatMap((tick, i) => [BigInt(channels[i]!), tick, 7n]));
    const path = await write([
      { name: 'table', data: table, shape: [count, 3], chunks: [512, 3], gzip: true },
    ]);
    const layout = tagsLayout({ dataset: '/table', field: 1 }, { dataset: '/table', field: 0 });
    const reader = await openFile(path, layout);
    expect(await readTags(reader, [513, 1600])).toEqual({ ticks: shifted, channels });
    await reader.close();
    expect((await inspect(path)).layout).toEqual(layout);
  });

  it('of a second pair are not passed over in silence', async () => {
    const pair = (group: string) => [
      { name: `${group}/t`, data: BigUint64Array.from(ticks) },
      { name: `${group}/pix`, data: Uint16Array.from(channels) },
    ];
    const one = await inspect(await write(pair('left')));
    const both = await inspect(await write([...pair('left'), ...pair('right')]));
    const unread = (warnings: readonly string[]) => warnings.filter((each) => each.includes('are not read'));
    expect(unread(one.warnings)).toEqual([]);
    expect(unread(both.warnings)).toHaveLength(1);
  });

  it('span a day at 1 ps', async () => {
    const day = 86_400n * 10n ** 12n;
    const times = [0n, 1n, day / 2n, day - 1n, day];
    const path = await write([
      { name: 't', data: BigUint64Array.from(times) },
      { name: 'c', data: Uint8Array.from([1, 2, 3, 4, 5]) },
    ]);
    const reader = await openFile(path, tagsLayout({ dataset: 't' }, { dataset: 'c' }));
    expect((await readTags(reader)).ticks).toEqual(times);
    await reader.close();
  });

  it('pass the extremes of 64 bits', async () => {
    const times = [2n ** 64n - 1n, 0n, 2n ** 63n, 5n];
    const path = await write([
      { name: 't', data: BigUint64Array.from(times) },
      { name: 'c', data: BigUint64Array.from([0n, 65535n, 1n, 2n]) },
    ]);
    const reader = await openFile(path, tagsLayout({ dataset: 't' }, { dataset: 'c' }));
    expect(await readTags(reader)).toEqual({ ticks: times, channels: [0, 65535, 1, 2] });
    await reader.close();
  });

  it.each([
    ['tick_fs', 81_000, 81_000],
    ['time_resolution_ps', 12.5, 12_500],
    ['tick_ns', 0.081, 81_000],
    ['tickPs', 4, 4000],
    ['tick_s', 1e-12, 1000],
  ])('take the tick from the attribute %s', async (name, value, tickFs) => {
    const path = await write(
      [
        { name: 'arrival', data: BigUint64Array.from(ticks) },
        { name: 'channel', data: Uint16Array.from(channels) },
      ],
      { attributes: { [name]: value, unrelated: 3 } },
    );
    const { layout, warnings } = await inspect(path);
    expect(layoutSchema.parse(layout)).toMatchObject({ tickFs });
    expect(warnings.join()).not.toContain('1 ps is proposed');
  });

  it('are proposed and summed up', async () => {
    const path = await write([
      { name: 'log', data: Float64Array.from([1, 2, 3]) },
      { name: 'a', data: Uint16Array.from(channels) },
      { name: 'b', data: BigUint64Array.from(ticks) },
    ]);
    const inspection = await inspect(path);
    expect(inspection.layout).toEqual(tagsLayout({ dataset: '/b' }, { dataset: '/a' }));
    expect(inspection.warnings).toEqual([expect.stringContaining('1 ps is proposed')]);
    expect(inspection.datasets).toEqual([
      { path: '/a', shape: [count], type: 'uint16', fields: [] },
      { path: '/b', shape: [count], type: 'uint64', fields: [] },
      { path: '/log', shape: [3], type: 'float64', fields: [] },
    ]);
    if (inspection.facts.kind !== 'tags') throw new Error('expected tags');
    expect(inspection.facts.first[0]).toEqual({ tick: String(ticks[0]), channel: 0 });
    expect(inspection.facts.channels.reduce((sum, each) => sum + each.count, 0)).toBe(count);
    expect(inspection.facts.sampledSeconds).toBeCloseTo(Number(ticks.at(-1)! - ticks[0]!) * 1e-12, 3);
  });
});

type GuessableColumn = Uint8Array | Uint32Array | BigInt64Array;

const pixelTypes: [string, (values: number[]) => DatasetToWrite['data'], string][] = [
  ['uint8', (values) => Uint8Array.from(values), 'uint8'],
  ['int16', (values) => Int16Array.from(values), 'int16'],
  ['uint16', (values) => Uint16Array.from(values), 'uint16'],
  ['int32', (values) => Int32Array.from(values), 'int32'],
  ['uint64', (values) => BigUint64Array.from(values, BigInt), 'uint64'],
  ['float32', (values) => Float32Array.from(values), 'float32'],
  ['float64', (values) => Float64Array.from(values), 'float64'],
];

describe('frames of HDF5', () => {
  const shape: [number, number, number] = [23, 6, 10];
  const pixels = Array.from({ length: 23 * 6 * 10 }, (_, i) => (i * 7919) % 120);

  it.each(pixelTypes)('of %s are exact, whatever the cuts', async (_name, make, type) => {
    for (const chunks of [undefined, [5, 4, 3]]) {
      const path = await write([
        { name: 'cam/raw', data: make(pixels), shape, ...(chunks ? { chunks, gzip: true } : {}) },
      ]);
      const reader = await openFile(path, framesLayout('/cam/raw'));
      expect(reader.facts).toMatchObject({ kind: 'frames', frames: 23, height: 6, width: 10, type });
      expect(await readPixels(reader)).toEqual(pixels);
      expect(await readPixels(reader, [1, 2, 17])).toEqual(pixels);
      await reader.close();
    }
  });

  it('are proposed when they are most of the file', async () => {
    const path = await write([
      { name: 'stack', data: Uint16Array.from(pixels), shape },
      { name: 'when', data: BigUint64Array.from(ticks.slice(0, 23)) },
      { name: 'temperature', data: Uint16Array.from(channels.slice(0, 23)) },
    ]);
    const { layout, facts, warnings } = await inspect(path);
    expect(layout).toEqual(framesLayout('/stack'));
    expect(facts).toMatchObject({ kind: 'frames', sampled: 23, max: 119 });
    expect(warnings).toEqual([expect.stringContaining('may be time tags')]);
  });

  it('come in blocks of bounded memory', async () => {
    const big: [number, number, number] = [24, 1024, 1024];
    const path = await write([
      { name: 'f', data: new Uint8Array(24 * 2 ** 20), shape: big, chunks: [3, 1024, 1024] },
    ]);
    const reader = await openFile(path, framesLayout('f'));
    const blocks: number[] = [];
    let bytes = 0;
    for await (const block of reader.read({ start: 0, end: 24 }, 0n, { cancelled: false })) {
      if (block.kind === 'frames') blocks.push(block.count);
      bytes += block.bytes;
    }
    expect(blocks).toEqual([6, 6, 6, 6]);
    expect(bytes).toBe(statSync(path).size);
    await reader.close();
  });

  it('of 64 bits past 2^53 are refused', async () => {
    const path = await write([
      { name: 'f', data: BigUint64Array.from([0n, 1n, 2n ** 53n, 3n]), shape: [1, 2, 2] },
    ]);
    const reader = await openFile(path, framesLayout('f'));
    expect((await problemOf(() => readPixels(reader), 'wrong-type')).place).toContain('/f');
    await reader.close();
  });
});

describe('the light reader', () => {
  it('reads classic files like the full library, and is chosen for them', async () => {
    const stack = Array.from({ length: 9 * 5 * 4 }, (_, i) => (i * 31) % 251);
    const path = await write(
      [
        {
          name: 'g/time',
          data: Uint32Array.from({ length: 500 }, (_, i) => 4294967295 - 500 + i),
          attributes: { tick_ps: 5 },
        },
        {
          name: 'g/signed',
          data: Int16Array.from({ length: 500 }, (_, i) => i - 250),
          chunks: [64],
          gzip: true,
        },
        { name: 'f', data: Uint8Array.from(stack), shape: [9, 5, 4], chunks: [2, 3, 3], gzip: true },
        { name: 'x', data: Float32Array.from(stack, (value) => value / 3), shape: [9, 5, 4] },
        {
          name: 'y',
          data: Float64Array.from(stack, (value) => value / 7),
          shape: [9, 5, 4],
          chunks: [4, 5, 4],
        },
      ],
      { libver: ['earliest', 'v108'] },
    );
    const source = await fileSource(path);
    const classic = await openClassicTree(source, await readSuperblock(source));
    const library = await openLibraryTree(source, nodeEnvironment);
    if (classic === null) throw new Error('expected the light reader to prove this file');
    expect(classic.datasets.map(({ path: name }) => name).sort()).toEqual(
      library.datasets.map(({ path: name }) => name),
    );
    for (const dataset of library.datasets) {
      const twin = classic.datasets.find((each) => each.path === dataset.path)!;
      expect(twin).toMatchObject({ shape: dataset.shape, type: dataset.type, chunkRows: dataset.chunkRows });
      for (const [start, end] of [
        [0, dataset.shape[0]!],
        [3, 8],
        [2, 2],
      ] as const) {
        expect(classic.readRows(twin, start, end)).toEqual(library.readRows(dataset, start, end));
      }
    }
    expect(classic.attributes('/g/time', () => true)).toEqual(library.attributes('/g/time', () => true));
    library.close();
    expect((await inspect(path, framesLayout('f'))).reader).toBe('jsfive');
    await source.close();
  });

  it.each<[string, DatasetToWrite[], Parameters<typeof writeHdf5>[2]]>([
    [
      '64-bit integers',
      [{ name: 't', data: BigUint64Array.from([1n, 2n ** 53n + 1n]) }],
      { libver: ['earliest', 'v108'] },
    ],
    [
      'the newest file version',
      [{ name: 't', data: Uint32Array.from([1, 2]), chunks: [1] }],
      { libver: 'latest' },
    ],
    [
      'an empty dataset',
      [{ name: 't', data: new Uint32Array(0), shape: [0] }],
      { libver: ['earliest', 'v108'] },
    ],
  ])('leaves %s to the full library', async (_name, datasets, options) => {
    const source = await fileSource(await write(datasets, options));
    expect(await openClassicTree(source, await readSuperblock(source))).toBeNull();
    await source.close();
  });
});
