import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Hdf5TagsLayout } from '../../shared/contracts/layout';
import {
  channels,
  count,
  framesLayout,
  inspect,
  makeHdf5Folder,
  tagsLayout,
  ticks,
} from './support/hdf5-files';
import { openFile, problemOf, readTags } from './support/sources';

let folder: Awaited<ReturnType<typeof makeHdf5Folder>>;
const write: (typeof folder)['write'] = (...given) => folder.write(...given);
beforeAll(async () => {
  folder = await makeHdf5Folder();
});
afterAll(() => folder.remove());

describe('what is wrong with an HDF5 file', () => {
  let path = '';
  beforeAll(async () => {
    path = await write([
      { name: 'time', data: BigUint64Array.from(ticks) },
      { name: 'short', data: Uint16Array.from(channels.slice(0, 9)) },
      { name: 'real', data: Float64Array.from(channels) },
      { name: 'minus', data: Int32Array.from(channels, (channel, i) => (i === 1234 ? -1 : channel)) },
      { name: 'cube', data: new Uint8Array(27), shape: [3, 3, 3] },
      { name: 'wide', data: new Uint8Array(40), shape: [2, 20] },
      { name: 'pair', data: Uint32Array.from({ length: 2 * count }, (_, i) => i), shape: [count, 2] },
    ]);
  });

  const at = (time: Hdf5TagsLayout['time'], channel: Hdf5TagsLayout['channel']) => tagsLayout(time, channel);

  it('names the datasets that exist when one is missing', async () => {
    const layout = at({ dataset: 'tim' }, { dataset: 'short' });
    for (const work of [() => openFile(path, layout), () => inspect(path, layout)]) {
      const problem = await problemOf(work, 'missing-dataset');
      expect(problem.message).toContain('/time');
      expect(problem.place).toContain('/tim');
    }
  });

  it('refuses columns that are none, or not of whole numbers', async () => {
    const time = { dataset: 'time' };
    const cases: [Hdf5TagsLayout['channel'], 'wrong-type' | 'bad-layout' | 'wrong-length', string][] = [
      [{ dataset: 'real' }, 'wrong-type', 'float64'],
      [{ dataset: 'cube' }, 'wrong-type', '3 x 3 x 3'],
      [{ dataset: 'wide', field: 1 }, 'wrong-type', '2 x 20'],
      [{ dataset: 'pair' }, 'bad-layout', 'none'],
      [{ dataset: 'pair', field: 2 }, 'bad-layout', '"2"'],
      [{ dataset: 'minus', field: 'x' }, 'bad-layout', '"x"'],
      [{ dataset: 'short' }, 'wrong-length', '9 channels'],
    ];
    for (const [channel, code, said] of cases) {
      const problem = await problemOf(() => openFile(path, at(time, channel)), code);
      expect(problem.message).toContain(said);
      expect(problem.place).toContain(channel.dataset);
    }
  });

  it('names the record whose channel is none', async () => {
    const reader = await openFile(path, at({ dataset: 'time' }, { dataset: 'minus' }));
    const problem = await problemOf(() => readTags(reader), 'wrong-type');
    expect(problem.place).toMatch(/\/minus, record 1234$/);
    await reader.close();
  });

  it('refuses frames that are none', async () => {
    expect((await problemOf(() => openFile(path, framesLayout('time')), 'wrong-type')).message).toContain(
      'three dimensions',
    );
    await problemOf(() => openFile(path, framesLayout('nothing')), 'missing-dataset');
  });

  it('names the filters when the bytes of a chunk are damaged', async () => {
    const { readFile, writeFile } = await import('node:fs/promises');
    const whole = await write([
      { name: 't', data: BigUint64Array.from(ticks), chunks: [count], gzip: true },
      { name: 'c', data: Uint16Array.from(channels) },
    ]);
    const bytes = await readFile(whole);
    // A deflate stream at best level begins 78 5e at level 4; spoil the middle of it.
    const start = bytes.indexOf(Buffer.from([0x78, 0x5e]));
    expect(start).toBeGreaterThan(0);
    bytes.fill(0xff, start + 20, start + 200);
    const damaged = folder.path('damaged');
    await writeFile(damaged, bytes);
    const reader = await openFile(damaged, at({ dataset: 't' }, { dataset: 'c' }));
    expect((await problemOf(() => readTags(reader), 'unreadable')).message).toContain('deflate');
    await reader.close();
  });
});
