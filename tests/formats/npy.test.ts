import { afterAll, describe, expect, it } from 'vitest';
import { type ArrayColumn, type Layout, layoutSchema } from '../../shared/contracts/layout';
import { z } from '../../shared/util/zod';
import { inspectSource } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { hashPixels, hashTags, runPython } from './support/python';
import { fileSource, makeFolder, openFile, readPixels, readTags } from './support/sources';

const column = z.record(z.string(), z.union([z.string(), z.number()]));
const saidSchema = z.object({
  tags: z.record(
    z.string(),
    z.object({ time: column, channel: column, sha256: z.string(), records: z.int(), proposed: z.boolean() }),
  ),
  frames: z.record(
    z.string(),
    z.object({ array: z.string().nullable(), shape: z.array(z.int()), sha256: z.string() }),
  ),
});

// The files are written here, because there is a test for each.
const folder = await makeFolder();
const said = saidSchema.parse(await runPython('write-with-numpy.py', ['numpy'], folder.path('')));
afterAll(() => folder.remove());

const tagsLayout = (time: ArrayColumn, channel: ArrayColumn): Layout => ({
  version: 1,
  format: 'npy',
  kind: 'tags',
  time,
  channel,
  tickFs: 1000,
});

async function inspect(name: string) {
  const source = await fileSource(folder.path(name), 'unknown');
  try {
    return await inspectSource(source, null, nodeEnvironment);
  } finally {
    await source.close();
  }
}

/** Every value compared with what NumPy 1.24 of Debian holds, by a hash it printed. */
describe('tags that NumPy wrote', () => {
  it.each(Object.entries(said.tags))('%s', async (name, { time, channel, sha256, records, proposed }) => {
    const layout = layoutSchema.parse(tagsLayout(time, channel));
    const inspection = await inspect(name);
    expect(inspection.reader).toBe('npy');
    if (proposed) {
      expect(inspection.layout).toEqual(layout);
      expect(inspection.because).toMatch(/rises like time/);
      expect(inspection.warnings.join(' ')).toContain('1 ps is proposed');
      expect(inspection.facts).toMatchObject({ kind: 'tags', records });
      if (inspection.facts.kind === 'tags') expect(inspection.facts.first).toHaveLength(20);
    }
    const reader = await openFile(folder.path(name), layout, 'unknown');
    expect(reader.facts).toEqual({ kind: 'tags', records, tickFs: 1000, reader: 'npy' });
    expect(hashTags(await readTags(reader))).toBe(sha256);
    // Again from the start: what is unpacked goes back.
    const cuts = [1, 2501, 3999].filter((cut) => cut < records);
    expect(hashTags(await readTags(reader, cuts))).toBe(sha256);
    await reader.close();
  });

  it('of an archive: every array is listed', async () => {
    const { datasets } = await inspect('deflated.npz');
    expect(datasets.map(({ path, shape, type }) => [path, shape, type])).toEqual([
      ['photon_time', [4000], 'uint64'],
      ['pixel', [4000], 'uint16'],
      ['gain', [], 'float32'],
      ['note', [], 'texts'],
      ['dark', [4000], 'float64'],
    ]);
    const fields = (await inspect('fields-others.npy')).datasets[0];
    expect(fields).toMatchObject({
      path: '',
      fields: ['note', 'nested', 'when', 'xs', 'where', 'half'],
      type: expect.stringContaining('when:uint64'),
    });
  });

  it('more bytes than the array are remarked upon', async () => {
    const { warnings } = await inspect('two-arrays.npy');
    expect(warnings.join(' ')).toMatch(/4128 bytes after its array, which are not read/);
  });
});

describe('frames that NumPy wrote', () => {
  it.each(Object.entries(said.frames))('%s', async (name, { array, shape, sha256 }) => {
    const layout: Layout = {
      version: 1,
      format: 'npy',
      kind: 'frames',
      ...(array === null ? {} : { array }),
    };
    const inspection = await inspect(name);
    expect(inspection.layout).toEqual(layout);
    const [frames, height, width] = shape;
    expect(inspection.facts).toMatchObject({ kind: 'frames', frames, height, width });
    const isSlow = inspection.warnings.some((warning) => warning.includes('Fortran order'));
    expect(isSlow).toBe(/-F-|fortran/.test(name));
    const reader = await openFile(folder.path(name), layout, 'unknown');
    expect(hashPixels(await readPixels(reader))).toBe(sha256);
    expect(hashPixels(await readPixels(reader, [4, 8, 29]))).toBe(sha256);
    await reader.close();
  });
});
