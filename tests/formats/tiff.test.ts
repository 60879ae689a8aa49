import { closeSync, ftruncateSync, openSync, writeSync } from 'node:fs';
import { writeFile } from 'node:fs/promises';
import { fromFile } from 'geotiff';
import { afterAll, describe, expect, it } from 'vitest';
import type { Layout } from '../../shared/contracts/layout';
import type { ByteSource } from '../../shared/contracts/reader';
import { z } from '../../shared/util/zod';
import { inspectSource, openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { hashPixels, runPython } from './support/python';
import { fileSource, makeFolder, openFile, readPixels } from './support/sources';
import { writeTiff } from './support/tiff-writer';

const saidSchema = z.record(z.string(), z.object({ shape: z.array(z.int()), sha256: z.string() }));

// The files are written here, because there is a test for each.
const folder = await makeFolder();
const said = saidSchema.parse(
  await runPython('write-with-tifffile.py', ['numpy', 'tifffile', 'PIL'], folder.path('')),
);
afterAll(() => folder.remove());

const layout: Layout = { version: 1, format: 'tiff', kind: 'frames' };

async function inspect(name: string) {
  const source = await fileSource(folder.path(name), 'unknown');
  try {
    return await inspectSource(source, null, nodeEnvironment);
  } finally {
    await source.close();
  }
}

/** Every pixel compared with what was given to tifffile 2023.2.3 or libtiff 4.5.0, by a hash of NumPy. */
describe('stacks that tifffile and libtiff wrote', () => {
  it.each(Object.entries(said))('%s', async (name, { shape, sha256 }) => {
    const [frames, height, width] = shape as [number, number, number];
    const inspection = await inspect(name);
    expect(inspection.layout).toEqual(layout);
    expect(inspection.facts).toMatchObject({ kind: 'frames', frames, height, width });
    expect(inspection.because).toMatch(/^(Big)?TIFF of \d+ frames/);
    const reader = await openFile(folder.path(name), layout, 'unknown');
    expect(hashPixels(await readPixels(reader))).toBe(sha256);
    expect(hashPixels(await readPixels(reader, [1, frames - 1]))).toBe(sha256);
    await reader.close();
  });

  it('are read by another reader alike', async () => {
    // geotiff 3.0.5 has decoders of its own for LZW, deflate and predictors.
    for (const name of [
      'lzw-big.tif',
      'packbits-big.tif',
      'libtiff-wide-f4-tiff_lzw-3.tif',
      'libtiff-noise-lzw-2.tif',
    ]) {
      const reader = await openFile(folder.path(name), layout);
      const ours = await readPixels(reader);
      await reader.close();
      const theirs: number[] = [];
      const tiff = await fromFile(folder.path(name));
      for (let page = 0; page < (await tiff.getImageCount()); page += 1) {
        theirs.push(...(await (await tiff.getImage(page)).readRasters({ interleave: true })));
      }
      tiff.close();
      expect(hashPixels(ours), name).toBe(hashPixels(theirs));
    }
  });

  it('whose pages are to be turned are read as stored, with a remark', async () => {
    const { warnings } = await inspect('turned.tif');
    expect(warnings.join(' ')).toContain('orientation 6');
  });
});

describe('the chain of pages', () => {
  it.each([
    ['at one distance', () => 0],
    ['at changing distances', (page: number) => (page * 37) % 50],
    ['at one distance but for one page', (page: number) => (page === 700 ? 1 : 0)],
  ] as const)('directories %s', async (_name, gap) => {
    const frames = Array.from({ length: 1000 }, (_, k) => Uint16Array.of(k, 2 * k, 3, 4));
    for (const isBig of [false, true]) {
      const bytes = writeTiff(frames, { width: 2, height: 2, isBig, isLittle: isBig, gap });
      const path = folder.path('chain');
      await writeFile(path, bytes);
      const reader = await openFile(path, layout);
      expect(await readPixels(reader, [499])).toEqual(frames.flatMap((frame) => [...frame]));
      await reader.close();
    }
  });

  it('far apart: the first frame of 16384 in 2 GB takes one small read a page and no more', async () => {
    const pages = 16384;
    const path = folder.path('long.tif');
    const frame = Uint16Array.from({ length: 65536 }, (_, k) => k);
    const one = writeTiff([frame], { width: 256, height: 256, isBig: false, isLittle: true });
    const step = one.length - 8;
    const directory = one.slice(8, 8 + step - frame.byteLength);
    const view = new DataView(directory.buffer);
    // The value of the sixth of nine entries of 12 bytes, and the link after all.
    const stripAt = 2 + 5 * 12 + 8;
    const linkAt = 2 + 9 * 12;
    const file = openSync(path, 'w');
    ftruncateSync(file, 8 + pages * step);
    writeSync(file, one);
    for (let page = 0; page < pages; page += 1) {
      const at = 8 + page * step;
      view.setUint32(stripAt, at + directory.length, true);
      view.setUint32(linkAt, page === pages - 1 ? 0 : at + step, true);
      writeSync(file, directory, 0, directory.length, at);
    }
    closeSync(file);
    const source = await fileSource(path);
    let bytesRead = 0;
    let reads = 0;
    const counted: ByteSource = {
      ...source,
      read: async (start, end, into) => {
        const bytes = await source.read(start, end, into);
        reads += 1;
        bytesRead += bytes.length;
        return bytes;
      },
    };
    const reader = await openReader(counted, layout, nodeEnvironment);
    expect(reader.facts).toMatchObject({ frames: pages });
    for await (const block of reader.read({ start: 0, end: 1 }, 0n, { cancelled: false })) {
      expect(block.kind === 'frames' && block.pixels).toEqual(frame);
    }
    expect(reads).toBeLessThan(1.01 * pages);
    expect(bytesRead).toBeLessThan(1000 * pages);
    await reader.close();
  });
});
