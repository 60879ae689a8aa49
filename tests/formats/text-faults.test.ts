import { describe, expect, it } from 'vitest';
import type { TextLayout } from '../../shared/contracts/layout';
import type { ByteSource } from '../../shared/contracts/reader';
import { inspectSource, openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { memorySource, problemOf, readTags } from './support/sources';
import { bytesOf, textLayout } from './support/text';

const open = (source: ByteSource, parts: Partial<TextLayout> = {}) =>
  openReader(source, textLayout(parts), nodeEnvironment);

const good = Array.from({ length: 40 }, (_, i) => `${i * 10},${i % 3}\n`).join('');

describe('a bad line is named by its number and column, with the way out', () => {
  it.each([
    ['abc,1', 1, 'a time', '"abc"', 'correct or remove the line'],
    ['12,x', 2, 'a whole channel number from 0 to 65535', '"x"', 'correct or remove the line'],
    ['12,65536', 2, 'a whole channel number', '"65536"', 'correct or remove'],
    ['12,-1', 2, 'a whole channel number', '"-1"', 'correct or remove'],
    ['12,1.5', 2, 'a whole channel number', '"1.5"', 'correct or remove'],
    ['12', 2, 'a whole channel number', 'only one column', 'complete or remove the line'],
    ['12,', 2, 'a whole channel number', 'nothing', 'correct or remove'],
    [',3', 1, 'a time', 'nothing', 'correct or remove'],
    ['1e,3', 1, 'a time', '"1e"', 'correct or remove'],
    ['1e5x,3', 1, 'a time', '"1e5x"', 'correct or remove'],
    ['NaN,3', 1, 'a time', '"NaN"', 'correct or remove'],
    ['-,3', 1, 'a time', '"-"', 'correct or remove'],
    ['0x12,3', 1, 'a time', '"0x12"', 'correct or remove'],
    ['1.2.3,3', 1, 'a time', '"1.2.3"', 'correct or remove'],
    ['"1,3', 1, 'a closing quotation mark', 'the end of the line', 'close it'],
    ['1e30,3', 1, 'a time within 2^63 ticks', '"1e30"', 'correct the line, or the unit'],
    ['1e999,3', 1, 'a time within 2^63 ticks', '"1e999"', 'correct the line'],
    [`${'7'.repeat(60)},3`, 1, 'a time', `"${'7'.repeat(40)}…"`, 'correct or remove'],
  ])('%j', async (line, column, expected, found, wayOut) => {
    const source = memorySource(bytesOf(`time,channel\n${good}${line}\n${good}`), 'run.csv');
    const reader = await open(source, { headerLines: 1 });
    const number = 42;
    for (const cuts of [[], [number - 2]]) {
      const problem = await problemOf(() => readTags(reader, cuts), 'wrong-type');
      expect(problem.place).toBe(`run.csv, line ${number}, column ${column}`);
      expect(problem.message).toContain(`Expected ${expected}`);
      expect(problem.message).toContain(`in column ${column} of line ${number}, found ${found}; ${wayOut}`);
    }
  });

  it('a zero byte far behind', async () => {
    const reader = await open(memorySource(bytesOf(`${good.repeat(900)}5\u0000,3\n`), 'run.csv'));
    const problem = await problemOf(() => readTags(reader), 'wrong-type');
    expect(problem.place).toBe('run.csv, line 36001, column 1');
    expect(problem.message).toContain('found "5�"');
  });

  it('a heading that was not announced, a decimal comma that was not', async () => {
    const heading = await open(memorySource(bytesOf(`time,channel\n${good}`)));
    expect((await problemOf(() => readTags(heading), 'wrong-type')).message).toContain(
      'raise the number of header lines if this is a heading',
    );
    const comma = await open(memorySource(bytesOf('1;2\n1,5;2\n')), { delimiter: 'semicolon' });
    expect((await problemOf(() => readTags(comma), 'wrong-type')).message).toContain(
      'found "1,5"; choose a decimal comma',
    );
  });

  it('layouts that contradict themselves', async () => {
    const source = memorySource(bytesOf(good));
    expect((await problemOf(() => open(source, { channelColumn: 0 }), 'bad-layout')).place).toBe(
      'channelColumn',
    );
    expect((await problemOf(() => open(source, { decimal: 'comma' }), 'bad-layout')).place).toBe('decimal');
  });

  it('a range outside the file', async () => {
    const reader = await open(memorySource(bytesOf(good)));
    await problemOf(async () => {
      for await (const block of reader.read({ start: 0, end: 41 }, 0n, { cancelled: false })) void block;
    }, 'bad-input');
  });
});

describe('bytes that are no such text', () => {
  const utf16 = (swap: boolean): Uint8Array => {
    const units = Uint16Array.from(`\uFEFF${good}`, (each) => each.charCodeAt(0));
    const bytes = new Uint8Array(units.buffer);
    return swap ? bytes.map((_, i) => bytes[i ^ 1]!) : bytes;
  };

  it.each([false, true])('UTF-16 is refused with the way out (swapped: %s)', async (swap) => {
    const source = memorySource(utf16(swap), 'run.txt');
    for (const work of [() => inspectSource(source, null, nodeEnvironment), () => open(source)]) {
      const problem = await problemOf(work, 'not-this-format');
      expect(problem.message).toContain('UTF-16; save it as UTF-8');
      expect(problem.place).toBe('run.txt, byte 0');
    }
  });

  it('binary zeros', async () => {
    const problem = await problemOf(() => open(memorySource(new Uint8Array(1e6), 'z')), 'not-this-format');
    expect(problem.message).toContain('found binary bytes');
    expect(problem.place).toBe('z, byte 0');
  });

  it('only a heading, only remarks, fewer lines than the header', async () => {
    for (const text of ['time,channel\n', '# nothing yet\n# nor here\n\n', '1,2\n']) {
      const reader = await open(memorySource(bytesOf(text)), { headerLines: text.startsWith('#') ? 0 : 3 });
      expect(await readTags(reader)).toEqual({ ticks: [], channels: [] });
    }
  });

  it('text is not opened as records or HDF5', async () => {
    const source = memorySource(bytesOf(good), 'run.csv');
    const layout = { version: 1, format: 'hdf5', kind: 'frames', dataset: '/x' } as const;
    const problem = await problemOf(() => openReader(source, layout, nodeEnvironment), 'not-this-format');
    expect(problem.message).toContain('text beginning "0,0"');
  });
});

describe('hostile files end soon, in bounded memory', () => {
  /** A file of endless `byte`s that keeps nothing. */
  function endless(byte: number, size: number): ByteSource & { most: number } {
    const source = {
      name: 'endless',
      size,
      ref: { name: 'endless', size },
      most: 0,
      read: async (start: number, end: number) => {
        source.most = Math.max(source.most, end - start);
        return new Uint8Array(Math.min(end, size) - start).fill(byte);
      },
      close: async () => {},
    };
    return source;
  }

  it('a line of 100 MB', async () => {
    const source = endless(0x37, 1e8);
    const start = performance.now();
    const inspected = await problemOf(() => inspectSource(source, null, nodeEnvironment), 'not-this-format');
    expect(inspected.message).toContain('text beginning "7777');
    const reader = await open(source);
    const problem = await problemOf(() => readTags(reader), 'not-this-format');
    expect(problem.message).toContain('Expected lines of at most 4194304 bytes');
    expect(problem.place).toBe('endless, line 1');
    expect(source.most).toBeLessThanOrEqual(2 ** 24);
    expect(performance.now() - start).toBeLessThan(2000);
  });

  it('a million columns', async () => {
    const line = `${'1,'.repeat(999_999)}1\n`;
    const start = performance.now();
    const source = memorySource(bytesOf(line.repeat(3)), 'wide');
    await problemOf(() => inspectSource(source, null, nodeEnvironment), 'not-this-format');
    const reader = await open(source, { channelColumn: 255 });
    expect(await readTags(reader)).toEqual({ ticks: [1n, 1n, 1n], channels: [1, 1, 1] });
    expect(performance.now() - start).toBeLessThan(2000);
  });

  it('a hundred million empty lines', async () => {
    const reader = await open(endless(0x0a, 1e8));
    expect(reader.facts).toMatchObject({ records: 1e8 });
    let records = 0;
    const start = performance.now();
    for await (const block of reader.read({ start: 5e7, end: 5.1e7 }, 0n, { cancelled: false })) {
      if (block.kind === 'tags') records += block.records;
    }
    expect(records).toBe(1e6);
    expect(performance.now() - start).toBeLessThan(2000);
  });
});
