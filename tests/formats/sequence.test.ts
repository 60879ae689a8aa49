import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Layout, RecordsLayout } from '../../shared/contracts/layout';
import type { Reader } from '../../shared/contracts/reader';
import { openReader } from '../../workers/formats/registry';
import { openSequence } from '../../workers/formats/sequence';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { writeHdf5 } from './support/hdf5-writer';
import { place, readReference, recordsLayout, writeRecords } from './support/record-writer';
import {
  fileSource,
  makeFolder,
  memorySource,
  never,
  problemOf,
  readPixels,
  readTags,
} from './support/sources';

/** Several files of bytes as one acquisition; the first is called a, the next b. */
async function sequence(layout: Layout, files: readonly Uint8Array[]): Promise<Reader> {
  const opened = files.map(async (bytes, i) => {
    const name = String.fromCharCode(97 + i);
    return { name, reader: await openReader(memorySource(bytes, name), layout, nodeEnvironment) };
  });
  return openSequence(await Promise.all(opened), layout);
}

/** The ranges read as workers do that tell each other their rollovers. */
async function readTold(reader: Reader, cuts: readonly number[]): Promise<bigint[]> {
  if (reader.facts.kind !== 'tags') throw new Error('expected tags');
  const borders = [0, ...[...cuts].sort((a, b) => a - b), reader.facts.records];
  const ticks: bigint[] = [];
  let offset = 0n;
  for (let k = 1; k < borders.length; k += 1) {
    const range = { start: borders[k - 1]!, end: borders[k]! };
    const advance = (await reader.advanceOf?.(range, never)) ?? 0n;
    for await (const block of reader.read(range, offset, never)) {
      if (block.kind !== 'tags') throw new Error('expected tags');
      for (let i = 0; i < block.count; i += 1) ticks.push(block.baseTick + BigInt(block.deltaTick[i]!));
    }
    offset += advance;
  }
  return ticks;
}

const field = (firstBit: number, bits: number) => ({ firstBit, bits });
const skip = [[{ field: field(30, 2), equals: 2 }]];
const short = { recordBytes: 4, headerBytes: 16, time: field(0, 12), channel: field(12, 4), skip };
const marker = (wraps: 'one' | 'time-field'): RecordsLayout['rollover'] => ({
  in: 'marker',
  when: [{ field: field(30, 2), equals: 3 }],
  advanceTick: 4096,
  wraps,
});

describe('records that roll over go on from file to file', () => {
  it.each([
    ['a wrapping time field', recordsLayout({ ...short, rollover: { in: 'wrap' } })],
    ['single markers', recordsLayout({ ...short, rollover: marker('one') })],
    ['counted markers', recordsLayout({ ...short, rollover: marker('time-field') })],
  ])('%s: cut anywhere, read in any ranges, the tags are those of the joined file', async (_name, layout) => {
    // One record in eight is a marker or is skipped.
    const value = fc
      .tuple(fc.nat(4095), fc.nat(15), fc.constantFrom(0, 0, 0, 0, 0, 0, 2, 3))
      .map(
        ([time, channel, kind]) =>
          place(BigInt(time), layout.time) |
          place(BigInt(channel), layout.channel) |
          place(BigInt(kind), field(30, 2)),
      );
    const cases = fc.tuple(
      fc.array(value, { minLength: 1, maxLength: 200 }),
      fc.array(fc.nat(200), { maxLength: 4 }),
      fc.array(fc.nat(200), { maxLength: 4 }),
    );
    await fc.assert(
      fc.asyncProperty(cases, async ([values, fileCuts, rangeCuts]) => {
        const borders = [0, ...fileCuts.map((cut) => Math.min(cut, values.length)), values.length];
        borders.sort((a, b) => a - b);
        const files = borders.slice(1).map((end, i) => writeRecords(layout, values.slice(borders[i]!, end)));
        const reader = await sequence(layout, files);
        expect(reader.facts).toMatchObject({ records: values.length });
        const cuts = rangeCuts.map((cut) => Math.min(cut, values.length));
        const wanted = readReference(layout, values);
        expect(await readTags(reader, cuts)).toEqual(wanted);
        expect(await readTold(reader, cuts)).toEqual(wanted.ticks);
      }),
      { numRuns: 150 },
    );
  });
});

describe('absolute times must go on by themselves', () => {
  const text: Layout = {
    version: 1,
    format: 'text',
    kind: 'tags',
    delimiter: 'comma',
    decimal: 'point',
    headerLines: 1,
    timeColumn: 0,
    channelColumn: 1,
    timeUnitFs: 1e9,
    tickFs: 1e9,
  };
  const file = (from: number, count: number): Uint8Array =>
    new TextEncoder().encode(
      `time (us),channel\n${Array.from({ length: count }, (_, i) => `${from + i * 1000},${i % 5}`).join('\n')}\n`,
    );

  it('text in three files, one without tags', async () => {
    const reader = await sequence(text, [file(0, 100), file(0, 0), file(100_000, 50), file(150_000, 1)]);
    const joined = await openReader(memorySource(file(0, 151)), text, nodeEnvironment);
    const wanted = await readTags(joined);
    wanted.channels[150] = 0;
    expect(await readTags(reader, [1, 99, 100, 101, 150])).toEqual(wanted);
  });

  it('HDF5 in two files', async () => {
    const folder = await makeFolder();
    const layout: Layout = {
      version: 1,
      format: 'hdf5',
      kind: 'tags',
      time: { dataset: 't' },
      channel: { dataset: 'c' },
      tickFs: 1000,
    };
    try {
      const parts = await Promise.all(
        [0, 1].map(async (k) => {
          const path = await writeHdf5(folder.path(`part-${k}.h5`), [
            {
              name: 't',
              data: BigUint64Array.from({ length: 300 }, (_, i) => 2n ** 60n + BigInt(k * 300 + i) * 977n),
            },
            { name: 'c', data: Uint16Array.from({ length: 300 }, (_, i) => i) },
          ]);
          return {
            name: `part-${k}.h5`,
            reader: await openReader(await fileSource(path), layout, nodeEnvironment),
          };
        }),
      );
      const reader = await openSequence(parts, layout);
      const tags = await readTags(reader, [299, 300, 450]);
      expect(tags.ticks).toEqual(Array.from({ length: 600 }, (_, i) => 2n ** 60n + BigInt(i) * 977n));
      await reader.close();
    } finally {
      await folder.remove();
    }
  });

  it('the order that works is proposed', async () => {
    const files = [file(200_000, 10), file(0, 10), file(100_000, 10)];
    const problem = await problemOf(() => sequence(text, files), 'out-of-order');
    expect(problem.place).toBe('b');
    expect(problem.message).toBe(
      'Expected b to begin where a ends, at tick 209000, found that it begins at tick 0: the files do not follow each other; give them in the order b, c, a.',
    );
  });

  it('none is proposed for files that overlap', async () => {
    const problem = await problemOf(() => sequence(text, [file(0, 100), file(50_000, 100)]), 'out-of-order');
    expect(problem.message).toContain('no order of them does');
  });

  it('tags a few milliseconds late at the border are no such case', async () => {
    const reader = await sequence(text, [file(0, 100), file(96_000, 10)]);
    expect((await readTags(reader)).ticks.length).toBe(110);
  });
});

describe('frames', () => {
  const layout: Layout = { version: 1, format: 'hdf5', kind: 'frames', dataset: 'f' };
  const stack = (frames: number, width: number, from: number) =>
    Uint16Array.from({ length: frames * width * 4 }, (_, i) => from + i);

  it('run on across files, whose size and type must agree', async () => {
    const folder = await makeFolder();
    const open = async (name: string, frames: number, width: number, from: number) => {
      const path = await writeHdf5(folder.path(name), [
        { name: 'f', data: stack(frames, width, from), shape: [frames, 4, width] },
      ]);
      return { name, reader: await openReader(await fileSource(path), layout, nodeEnvironment) };
    };
    try {
      const [first, second, odd] = [
        await open('near-1.h5', 5, 3, 0),
        await open('near-2.h5', 7, 3, 60),
        await open('near-3.h5', 7, 5, 0),
      ];
      const reader = await openSequence([first, second], layout);
      expect(reader.facts).toMatchObject({ kind: 'frames', frames: 12, width: 3, height: 4 });
      expect(await readPixels(reader, [4, 9])).toEqual(Array.from({ length: 144 }, (_, i) => i));
      const problem = await problemOf(() => openSequence([first, second, odd], layout), 'wrong-type');
      expect(problem.place).toBe('near-3.h5');
      expect(problem.message).toContain('Expected frames of 3 x 4 pixels');
      expect(problem.message).toContain('found frames of 5 x 4 pixels');
      for (const { reader: each } of [first, second, odd]) await each.close();
    } finally {
      await folder.remove();
    }
  });
});
