import { execFile } from 'node:child_process';
import { access } from 'node:fs/promises';
import { promisify } from 'node:util';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Hdf5TagsLayout, Layout } from '../../shared/contracts/layout';
import { inspectSource, openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { fileSource, makeFolder, openFile, problemOf, readPixels, readTags } from './support/sources';

/** Debian's, whose h5py comes as a package of the system. */
const python = '/usr/bin/python3';
const script = new URL('./write-with-h5py.py', import.meta.url).pathname;

let folder: Awaited<ReturnType<typeof makeFolder>>;
beforeAll(async () => {
  folder = await makeFolder();
  const run = promisify(execFile);
  try {
    await access(python);
    await run(python, ['-c', 'import h5py, numpy']);
  } catch (thrown) {
    throw new Error(
      `These tests write files by ${python} with h5py, which is missing: apt-get install python3-h5py`,
      { cause: thrown },
    );
  }
  await run(python, [script, folder.path('')]);
});
afterAll(() => folder.remove());

const count = 4000;
const index = Array.from({ length: count }, (_, i) => i);
const ticks = index.map((i) => 2n ** 53n - 6000n + 3n * BigInt(i) + (i > 2500 ? 2n ** 58n : 0n));
const channels = index.map((i) => (i * 53) % 1024);
const pixels = Array.from({ length: 30 * 12 * 20 }, (_, i) => (i * 7919) % 250);

function tags(time: Hdf5TagsLayout['time'], channel: Hdf5TagsLayout['channel'], tickFs = 1000): Layout {
  return { version: 1, format: 'hdf5', kind: 'tags', time, channel, tickFs };
}

const frames = (dataset: string): Layout => ({ version: 1, format: 'hdf5', kind: 'frames', dataset });

const tagFiles: [string, Layout][] = [
  [
    'compound',
    tags({ dataset: '/shots/log', field: 'fired_at' }, { dataset: '/shots/log', field: 'element' }),
  ],
  ['columns', tags({ dataset: '/both', field: 1 }, { dataset: '/both', field: 0 })],
  ['big-endian', tags({ dataset: '/run/zeit' }, { dataset: '/run/ort' }, 81_000)],
  ['resizable', tags({ dataset: '/t' }, { dataset: '/c' })],
  ['userblock', tags({ dataset: '/t' }, { dataset: '/c' })],
  ['mixed-order', tags({ dataset: '/events', field: 't' }, { dataset: '/events', field: 'c' })],
];

describe.each(['earliest', 'latest'])('files of h5py, file version %s', (version) => {
  const inspect = async (name: string) => {
    const source = await fileSource(folder.path(`${name}-${version}`), 'unknown');
    const inspection = await inspectSource(source, null, nodeEnvironment);
    await source.close();
    return inspection;
  };
  const open = (name: string, layout: Layout) =>
    openFile(folder.path(`${name}-${version}`), layout, 'unknown');

  it.each(tagFiles)('%s: the layout is proposed from the bytes and gives every tag', async (name, layout) => {
    expect((await inspect(name)).layout).toEqual(layout);
    const reader = await open(name, layout);
    expect(reader.facts.reader).toBe('h5wasm');
    expect(await readTags(reader)).toEqual({ ticks, channels });
    expect(await readTags(reader, [1, 2501, 3999])).toEqual({ ticks, channels });
    await reader.close();
  });

  it('small and classic files are read by the light reader, all others by the full library', async () => {
    const layout = tags({ dataset: '/t32' }, { dataset: '/c16' });
    const inspection = await inspect('small');
    expect(inspection.layout).toEqual(layout);
    expect(inspection.reader).toBe(version === 'earliest' ? 'jsfive' : 'h5wasm');
    expect(inspection.because).toContain(`(${inspection.reader})`);
    const reader = await open('small', layout);
    expect(await readTags(reader, [600])).toEqual({ ticks: index.map((i) => 7n * BigInt(i)), channels });
    await reader.close();
  });

  it.each([
    ['frames', '/camera/shots', 'uint16'],
    ['frames-plain', '/shots', 'uint8'],
  ])('%s: every pixel', async (name, dataset, type) => {
    const inspection = await inspect(name);
    expect(inspection.layout).toEqual(frames(dataset));
    expect(inspection.facts).toMatchObject({
      kind: 'frames',
      frames: 30,
      height: 12,
      width: 20,
      type,
      max: 249,
    });
    expect(inspection.reader).toBe(version === 'earliest' ? 'jsfive' : 'h5wasm');
    const reader = await open(name, frames(dataset));
    expect(await readPixels(reader, [4, 8])).toEqual(pixels);
    await reader.close();
  });

  it.each(['channel', 'colour', 'run', 'half'])(
    'frames-%s: an axis of length 1, and half floats',
    async (name) => {
      const inspection = await inspect(`frames-${name}`);
      expect(inspection.layout).toEqual(frames('/shots'));
      expect(inspection.facts).toMatchObject({ kind: 'frames', frames: 30, height: 12, width: 20 });
      const reader = await open(`frames-${name}`, frames('/shots'));
      expect(await readPixels(reader, [4, 8])).toEqual(pixels);
      await reader.close();
    },
  );

  it('a filter that is not at hand is named', async () => {
    const inspection = await inspect('lzf');
    expect(inspection.warnings.join('\n')).toMatch(
      /\/t is packed by the filter lzf \(32000\).*save it with gzip/,
    );
    const layout = tags({ dataset: 't' }, { dataset: 'c' });
    expect((await problemOf(() => open('lzf', layout), 'unsupported')).message).toContain('lzf');
  });

  it('chunks that were never written hold the fill value', async () => {
    const reader = await open('holes', frames('shots'));
    expect(reader.facts.reader).toBe('h5wasm');
    expect(await readPixels(reader)).toEqual(pixels.map((pixel, i) => (i < 10 * 240 ? pixel : 9)));
    await reader.close();
  });

  it('data of other files is refused, cycles of links end', async () => {
    const inspection = await inspect('foreign');
    expect(inspection.datasets.map(({ path }) => path).sort()).toEqual(['/again', '/joined', '/t']);
    expect(inspection.warnings.join('\n')).toMatch(/\/elsewhere is a link into another file/);
    const time = { dataset: 't' };
    const external = await problemOf(
      () => open('foreign', tags(time, { dataset: 'elsewhere' })),
      'unsupported',
    );
    expect(external.message).toContain(`small-${version}`);
    const virtual = await problemOf(() => open('foreign', tags(time, { dataset: 'joined' })), 'unsupported');
    expect(virtual.message).toContain(`gone-${version}`);
  });

  it('a cut file is called truncated, wherever it was cut', async () => {
    const source = await fileSource(folder.path(`big-endian-${version}`), 'run.h5');
    const { size } = source;
    for (const length of [4, 8, 20, 40, 95, 200, 1000, Math.floor(size / 2), size - 1]) {
      const cut = {
        ...source,
        size: length,
        read: (start: number, end: number) => source.read(start, Math.min(end, length)),
      };
      for (const work of [
        () => inspectSource(cut, null, nodeEnvironment),
        () => openReader(cut, tagFiles[2]![1], nodeEnvironment),
      ]) {
        const problem = await problemOf(work, 'truncated');
        expect(problem.place).toBe(`run.h5, byte ${length}`);
        expect(problem.message).toContain('copy it again');
      }
    }
    await source.close();
  });
});
