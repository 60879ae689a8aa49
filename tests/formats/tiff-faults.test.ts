import { readFile } from 'node:fs/promises';
import { afterAll, describe, expect, it } from 'vitest';
import type { Layout } from '../../shared/contracts/layout';
import type { ByteSource } from '../../shared/contracts/reader';
import type { ProblemCode } from '../../shared/errors/problem';
import { inspectSource, openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { runPython } from './support/python';
import { makeFolder, memorySource, problemOf, readPixels } from './support/sources';
import { type Entry, type TiffOptions, writeTiff } from './support/tiff-writer';

const folder = await makeFolder();
await runPython('write-with-tifffile.py', ['numpy', 'tifffile', 'PIL'], folder.path(''));
afterAll(() => folder.remove());

const layout: Layout = { version: 1, format: 'tiff', kind: 'frames' };

async function readAll(source: ByteSource): Promise<void> {
  await readPixels(await openReader(source, layout, nodeEnvironment));
}

/** Whatever is wrong must be said within two seconds of the processor. */
async function refused(source: ByteSource, code: ProblemCode, message: RegExp, place: RegExp): Promise<void> {
  const start = process.cpuUsage();
  const problem = await problemOf(() => readAll(source), code);
  expect(problem.message).toMatch(message);
  expect(problem.place).toMatch(place);
  const { user, system } = process.cpuUsage(start);
  expect((user + system) / 1e6).toBeLessThan(2);
}

describe('pictures that are no frames', () => {
  it.each<[string, ProblemCode, RegExp, RegExp]>([
    ['colours.tif', 'unsupported', /red, green and blue.*grey values/, /page 0$/],
    ['white-is-zero.tif', 'unsupported', /white as zero/, /page 0$/],
    ['palette.tif', 'unsupported', /a palette of colours/, /page 0$/],
    ['complex.tif', 'unsupported', /sample format 6 of 64 bits/, /page 0$/],
    ['two-bits.tif', 'unsupported', /uint samples of 1 bits/, /page 0$/],
    ['jpeg.tif', 'unsupported', /compressed by JPEG.*without compression/, /page 0$/],
    ['sizes.tif', 'wrong-type', /found height 30 at page 2 and 37 at page 0/, /sizes\.tif, page 2$/],
    ['types.tif', 'wrong-type', /found sample format 2 at page 2/, /types\.tif, page 2$/],
  ])('%s', async (name, code, message, place) => {
    const source = memorySource(await readFile(folder.path(name)), name);
    await refused(source, code, message, place);
    await problemOf(() => inspectSource(source, null, nodeEnvironment), code);
  });

  it('no TIFF at all', async () => {
    const source = memorySource(new Uint8Array(200), 'a.tif');
    await refused(source, 'not-this-format', /Expected a TIFF file/, /byte 0$/);
  });
});

const frames = Array.from({ length: 5 }, (_, k) => Uint16Array.from({ length: 600 }, (_, i) => i * k));
const base: TiffOptions = { width: 20, height: 30, isBig: false, isLittle: true };

/** Page `page` with one entry changed. */
function lying(tag: number, value: number, page = 3, type?: number, count?: number): Partial<TiffOptions> {
  return {
    change: (entries, at) =>
      at !== page
        ? entries
        : entries.map(
            (entry): Entry => (entry[0] === tag ? [tag, type ?? entry[1], count ?? entry[2], value] : entry),
          ),
  };
}

const without = (tag: number): Partial<TiffOptions> => ({
  change: (entries) => entries.filter((entry) => entry[0] !== tag),
});

describe.each([
  ['TIFF', false],
  ['BigTIFF', true],
])('lies in %s', (_name, isBig) => {
  const much = isBig ? 10 ** 12 : 4 * 10 ** 9;
  const word = isBig ? 16 : 4;
  it.each<[string, Partial<TiffOptions>, ProblemCode, RegExp, RegExp]>([
    [
      'pages in a circle',
      { link: (next, page) => (page === 4 ? start(0) : next) },
      'unreadable',
      /back to itself/,
      /page \d+/,
    ],
    [
      'a page that follows itself',
      { link: (next, page) => (page === 2 ? start(2) : next) },
      'unreadable',
      /back to itself/,
      /page \d/,
    ],
    [
      'a page past the end',
      { link: (next, page) => (page === 1 ? 10 ** 9 : next) },
      'truncated',
      /page 2 .* at byte 1000000000/,
      /page 2, byte \d+$/,
    ],
    [
      'a page of nothing',
      { link: (next, page) => (page === 1 ? start(1) - 4 : next) },
      'unreadable',
      /./,
      /page 2/,
    ],
    [
      'pixels past the end',
      lying(273, 10 ** 9),
      'truncated',
      /page 3 at byte 1000000000/,
      /page 3, byte \d+$/,
    ],
    [
      'more pixels than are told',
      lying(279, 100),
      'unreadable',
      /100 bytes where 1200 are needed/,
      /page 3$/,
    ],
    ['no pixels', lying(279, 0), 'unreadable', /0 bytes/, /page 3$/],
    ['a width of nothing', lying(256, 0, 0), 'unreadable', /0 x 30/, /page 0$/],
    ['a height of nothing', lying(257, 0, 0), 'unreadable', /20 x 0/, /page 0$/],
    ['a width beyond all', lying(256, much, 0, word), 'unsupported', /more than 268435456/, /page 0$/],
    [
      'many strips',
      lying(273, 8, 3, word, much),
      'truncated',
      /places of parts of page 3/,
      /page 3, byte \d+$/,
    ],
    ['strips of no rows', lying(278, 0, 0), 'wrong-type', /rows per strip 30 at page 1 and 0/, /page 1$/],
    [
      'rows of half a strip',
      { change: (entries) => entries.map((entry): Entry => (entry[0] === 278 ? [278, 4, 1, 15] : entry)) },
      'unreadable',
      /2 parts at page 0/,
      /page 0$/,
    ],
    ['no offsets', without(273), 'unreadable', /1 parts at page 0.*found 0/, /page 0$/],
    ['another compression', lying(259, 50000, 0), 'unsupported', /Zstandard/, /page 0$/],
    ['a compression of no name', lying(259, 12345, 0), 'unsupported', /number 12345/, /page 0$/],
    ['an offset in letters', lying(273, 8, 3, 2), 'unreadable', /type 2/, /page 3/],
  ])('%s', async (_case, options, code, message, place) => {
    const bytes = writeTiff(frames, { ...base, isBig, ...options });
    await refused(memorySource(bytes, 'lie.tif'), code, message, place);
  });

  /** Where the directory of a page starts in an honest file. */
  function start(page: number): number {
    return isBig ? 16 + page * (16 + 9 * 20 + 1200) : 8 + page * (6 + 9 * 12 + 1200);
  }

  it('without sizes of strips is read, as there is one', async () => {
    const bytes = writeTiff(frames, { ...base, isBig, ...without(279) });
    const reader = await openReader(memorySource(bytes), layout, nodeEnvironment);
    expect(await readPixels(reader)).toEqual(frames.flatMap((frame) => [...frame]));
  });

  it('a circle among 20 000 pages', async () => {
    const many = Array.from({ length: 20_000 }, () => Uint16Array.of(1));
    const bytes = writeTiff(many, {
      ...base,
      width: 1,
      height: 1,
      isBig,
      link: (next, page) => (page === 19_999 ? (isBig ? 16 : 8) : next),
    });
    await refused(memorySource(bytes), 'unreadable', /back to itself/, /page \d+/);
  });
});

describe('packed parts that are damaged', () => {
  it.each([
    ['u2-little-deflate.tif', /found (another checksum|invalid|unexpected|\d+ of|no zlib)/],
    ['libtiff-wide-u2-tiff_lzw-2.tif', /found (a code that is none|\d+ of)/],
  ])('%s', async (name, message) => {
    const bytes = new Uint8Array(await readFile(folder.path(name)));
    // libtiff writes pixels before the directory, tifffile after it: the middle is pixels in both.
    bytes.fill(0xff, bytes.length >> 1, (bytes.length >> 1) + 40);
    await refused(memorySource(bytes, 'packed.tif'), 'unreadable', message, /packed\.tif, page \d+$/);
  });
});

describe('stacks that were cut', () => {
  it.each([
    'u2-big-classic.tif',
    'u1-little-bigtiff.tif',
    'apart-True.tif',
    'strips-of-7.tif',
    'u2-little-tiles.tif',
    'libtiff-small-u2-tiff_lzw-2.tif',
    'described.tif',
    'described-images.tif',
  ])('%s', async (name) => {
    const bytes = await readFile(folder.path(name));
    for (const length of [4, 7, 12, 20, 100, 300, bytes.length >> 1, Math.floor(0.95 * bytes.length)]) {
      const source = memorySource(bytes.subarray(0, length), 'run');
      for (const work of [() => inspectSource(source, null, nodeEnvironment), () => readAll(source)]) {
        const problem = await problemOf(work, 'truncated');
        expect(problem.place).toMatch(new RegExp(`^run, (page \\d+, )?byte ${length}$`));
        expect(problem.message).toContain('copy or save it again');
      }
    }
  });
});
