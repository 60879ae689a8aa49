import { readFile } from 'node:fs/promises';
import { afterAll, describe, expect, it } from 'vitest';
import type { ArrayColumn, Layout } from '../../shared/contracts/layout';
import type { ProblemCode } from '../../shared/errors/problem';
import { parseLiteral } from '../../workers/formats/npy/literal';
import { inspectSource, openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { runPython } from './support/python';
import { makeFolder, memorySource, problemOf, readPixels, readTags } from './support/sources';

const folder = await makeFolder();
await runPython('write-with-numpy.py', ['numpy'], folder.path(''));
afterAll(() => folder.remove());

const tagsOf = (time: ArrayColumn, channel: ArrayColumn): Layout => ({
  version: 1,
  format: 'npy',
  kind: 'tags',
  time,
  channel,
  tickFs: 1000,
});
const columns = tagsOf({ field: 0 }, { field: 1 });
const pair = tagsOf({ array: 't' }, { array: 'c' });
const frames: Layout = { version: 1, format: 'npy', kind: 'frames' };

async function open(name: string): Promise<ReturnType<typeof memorySource>> {
  return memorySource(await readFile(folder.path(name)), name);
}

/** Opens and reads all; whatever is wrong must be said within two seconds of the processor. */
async function readAll(source: ReturnType<typeof memorySource>, layout: Layout): Promise<void> {
  const reader = await openReader(source, layout, nodeEnvironment);
  if (reader.facts.kind === 'tags') await readTags(reader);
  else await readPixels(reader);
}

async function refused(
  name: string,
  layout: Layout,
  code: ProblemCode,
  message: RegExp,
  place: RegExp,
): Promise<void> {
  const start = process.cpuUsage();
  const problem = await problemOf(async () => readAll(await open(name), layout), code);
  expect(problem.message).toMatch(message);
  expect(problem.place).toMatch(place);
  const { user, system } = process.cpuUsage(start);
  expect((user + system) / 1e6).toBeLessThan(2);
}

describe('arrays that are no tags or frames', () => {
  const cases: [string, Layout, ProblemCode, RegExp, RegExp][] = [
    ['objects.npy', columns, 'unsupported', /pickled and never unpacked/, /^objects\.npy, byte 10$/],
    ['objects.npz', tagsOf({ array: 'o' }, { array: 'c' }), 'unsupported', /pickled/, /objects\.npz, o\.npy/],
    ['fractions.npy', columns, 'wrong-type', /0\.333.* at record 1;.*rint/, /record 1$/],
    ['late-fraction.npy', columns, 'wrong-type', /found 0\.5 at record 3900/, /record 3900$/],
    ['lost-ticks.npy', columns, 'wrong-type', /below 2\^53 for the time/, /record 2000$/],
    ['minus.npy', columns, 'wrong-type', /found -1 at record 1234/, /minus\.npy, record 1234$/],
    ['complex.npy', frames, 'wrong-type', /complex numbers/, /^complex\.npy$/],
    ['complex.npy', columns, 'wrong-type', /complex numbers with shape 30 x 12 x 20/, /^complex\.npy$/],
    ['dates.npy', tagsOf({}, {}), 'wrong-type', /dates/, /^dates\.npy$/],
    ['single.npy', columns, 'wrong-type', /single value/, /^single\.npy$/],
    ['plane.npy', frames, 'wrong-type', /shape 12 x 20/, /^plane\.npy$/],
    ['no-frames.npy', frames, 'wrong-type', /no pixels \(0 x 4 x 5\)/, /^no-frames\.npy$/],
    ['unequal.npz', pair, 'wrong-length', /9 channels in c and 4000 times in t/, /c\.npy$/],
    ['fractions.npy', tagsOf({ field: 2 }, { field: 0 }), 'bad-layout', /"2"; its columns are 0, 1/, /./],
    ['fractions.npy', tagsOf({}, { field: 0 }), 'bad-layout', /none named/, /./],
    ['fractions.npy', pair, 'bad-layout', /one array without a name/, /./],
    ['unequal.npz', columns, 'missing-dataset', /names no array of unequal\.npz; it holds t, c/, /./],
    ['unequal.npz', tagsOf({ array: 'x' }, { array: 'c' }), 'missing-dataset', /no array "x"/, /x$/],
    ['unequal.npz', tagsOf({ array: 't', field: 0 }, { array: 'c' }), 'bad-layout', /one column only/, /./],
    ['fields-packed.npy', tagsOf({ field: 'at' }, { field: 'where' }), 'bad-layout', /when, where/, /./],
    ['fields-others.npy', tagsOf({ field: 'nested' }, { field: 'where' }), 'wrong-type', /"nested" of/, /./],
    ['fields-others.npy', tagsOf({ field: 'xs' }, { field: 'where' }), 'wrong-type', /"xs" of/, /./],
    ['bzip2.npz', pair, 'unsupported', /packed by bzip2.*savez_compressed/, /bzip2\.npz, t\.npy$/],
    ['texts.zip', pair, 'not-this-format', /"notes\.txt"; unpack it/, /byte 0$/],
    ['empty.npz', pair, 'not-this-format', /found nothing/, /byte 0$/],
    ['bomb.npz', pair, 'unreadable', /found more bytes/, /bomb\.npz, byte \d+$/],
    ['claims.npz', pair, 'unreadable', /claims 4000000000 bytes/, /t\.npy$/],
    ['beyond.npz', pair, 'truncated', /1000000 bytes of "c\.npy"/, /beyond\.npz, byte \d+$/],
    ['checksum.npz', pair, 'unreadable', /another checksum/, /checksum\.npz, byte \d+$/],
    ['trillion.npy', tagsOf({}, {}), 'truncated', /1000000000000\).*found 328/, /byte 328$/],
    ['trillion.npz', pair, 'truncated', /1000000000000\)/, /t\.npy, byte 328$/],
  ];
  it.each(cases)('%s', (name, layout, code, message, place) => refused(name, layout, code, message, place));

  it('frames of more than 256 MiB, columns of records of more than 64 KiB', async () => {
    const large = npy("{'descr': '|u1', 'fortran_order': False, 'shape': (1, 20000, 20000), }");
    const source = { ...memorySource(large, 'large.npy'), size: 5e8 };
    await problemOf(() => openReader(source, frames, nodeEnvironment), 'unsupported');
    const wide = npy("{'descr': [('t', '<u8'), ('', '|V70000')], 'fortran_order': False, 'shape': (1,), }");
    const records = { ...memorySource(wide, 'wide.npy'), size: 5e8 };
    await problemOf(
      () => openReader(records, tagsOf({ field: 't' }, { field: 't' }), nodeEnvironment),
      'unsupported',
    );
  });

  it('inspection shows what is there and says what is wrong with it', async () => {
    const { datasets, warnings, layout } = await inspectSource(
      await open('objects.npz'),
      null,
      nodeEnvironment,
    );
    expect(datasets.map(({ path }) => path)).toEqual(['t', 'c']);
    expect(layout).toEqual(pair);
    expect(warnings[0]).toContain('pickled');
    for (const name of ['fractions.npy', 'plane.npy', 'single.npy']) {
      const inspection = await inspectSource(await open(name), null, nodeEnvironment);
      expect(inspection).toMatchObject({ layout: null, facts: { kind: 'none' } });
      expect(inspection.because).toContain('numpy.savez');
    }
  });

  it('Fortran order that would take too many readings', async () => {
    const head = npy("{'descr': '<u2', 'fortran_order': True, 'shape': (100000, 256, 256), }");
    const source = { ...memorySource(head, 'huge.npy'), size: 2e10 };
    const problem = await problemOf(() => openReader(source, frames, nodeEnvironment), 'unsupported');
    expect(problem.message).toMatch(/98 readings of the whole array.*ascontiguousarray/);
  });
});

/** A header of version 1.0 around a text. */
function npy(text: string, data = new Uint8Array(0)): Uint8Array {
  const bytes = new Uint8Array(10 + text.length + data.length);
  bytes.set([0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59, 1, 0, text.length & 255, text.length >> 8]);
  bytes.set(new TextEncoder().encode(text), 10);
  bytes.set(data, 10 + text.length);
  return bytes;
}

describe('headers that are none', () => {
  it.each([
    '',
    '[]',
    "{'descr': '<u8', 'fortran_order': False}",
    "{'descr': '<u8', 'fortran_order': 0, 'shape': (2,)}",
    "{'descr': '<u8', 'fortran_order': False, 'shape': (-2,)}",
    "{'descr': '<u8', 'fortran_order': False, 'shape': (2.5,)}",
    "{'descr': '<u8', 'fortran_order': False, 'shape': 2}",
    "{'descr': '<u8', 'fortran_order': False, 'shape': (99999999999999999999,)}",
    "{'descr': '<u8', 'fortran_order': False, 'shape': (9999999999999, 9999999999999)}",
    "{'descr': '<u3', 'fortran_order': False, 'shape': (2,)}",
    "{'descr': '=u8', 'fortran_order': False, 'shape': (2,)}",
    "{'descr': [('a',)], 'fortran_order': False, 'shape': (2,)}",
    "{'descr': [('a', '|V2147483647')], 'fortran_order': False, 'shape': (2,)}",
    "{'descr': __import__('os').getcwd(), 'fortran_order': False, 'shape': (2,)}",
    "{'descr': '<u8', 'descr': '<u8', 'fortran_order': False, 'shape': (2,)}",
    "{'descr': '<u8', 'fortran_order': False, 'shape': (2,)} trailing",
    `{'descr': ${'['.repeat(5000)}`,
    "{'descr': 'unfinished",
  ])('%s', async (text) => {
    const problem = await problemOf(
      () => openReader(memorySource(npy(text), 'bad.npy'), columns, nodeEnvironment),
      'unreadable',
    );
    expect(problem.place).toBe('bad.npy, byte 10');
    expect(problem.message).toContain('save it again by numpy.save');
  });

  it('newer versions and longer headers than any', async () => {
    const newer = npy('{}');
    newer[6] = 4;
    await problemOf(() => openReader(memorySource(newer), columns, nodeEnvironment), 'newer-version');
    const long = npy('{}'.repeat(8));
    long.set([2, 0, 255, 255, 255, 255], 6);
    await problemOf(() => openReader(memorySource(long), columns, nodeEnvironment), 'unreadable');
  });
});

describe('literals of Python', () => {
  it.each<[string, unknown]>([
    [
      '{\'a\': (1, 2,), "b": [True, False, None], }',
      new Map<string, unknown>([
        ['a', [1, 2]],
        ['b', [true, false, null]],
      ]),
    ],
    ['(3L,)', [3]],
    ['()', []],
    ['(7)', 7],
    ['[-12]', [-12]],
    ["'a\\'b\\\\c\\x41\\u00e9\\n'", "a'b\\cA\u00e9\n"],
  ])('%s', (text, value) => expect(parseLiteral(text)).toEqual(value));

  it.each([
    '1e5',
    '0x10',
    'True1',
    '{1: 2}',
    "'\\q'",
    "'\\x4'",
    'a',
    '(1 2)',
    '[1',
    '{',
    "{'a'}",
    '--1',
    '1.0',
  ])('refused: %s', (text) => expect(() => parseLiteral(text)).toThrow(SyntaxError));
});

describe('files that were cut', () => {
  it.each([
    ['fields-packed.npy', tagsOf({ field: 'when' }, { field: 'where' })],
    ['frames-C-little-u2.npy', frames],
    ['stored.npz', tagsOf({ array: 'photon_time' }, { array: 'pixel' })],
    ['deflated.npz', tagsOf({ array: 'photon_time' }, { array: 'pixel' })],
  ] as const)('%s', async (name, layout) => {
    const bytes = await readFile(folder.path(name));
    const places = [4, 6, 9, 11, 60, 128, 129, 1000, bytes.length >> 1, bytes.length - 100, bytes.length - 1];
    for (const length of places) {
      const source = memorySource(bytes.subarray(0, length), 'run');
      for (const work of [
        () => inspectSource(source, null, nodeEnvironment),
        () => readAll(source, layout),
      ]) {
        const problem = await problemOf(work, 'truncated');
        expect(problem.place).toBe(`run, byte ${length}`);
        expect(problem.message).toContain('copy or save it again');
      }
    }
  });
});
