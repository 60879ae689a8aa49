import { describe, expect, it } from 'vitest';
import type { Layout } from '../../shared/contracts/layout';
import { formatById, formats, inspectSource, openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { place, recordsLayout, writeRecords, writeTags } from './support/record-writer';
import { memorySource, problemOf, readTags } from './support/sources';

const hdf5: Layout = { version: 1, format: 'hdf5', kind: 'frames', dataset: '/x' };

/** A repeatable stream of integers below `limit`; a multiplicative generator is random enough for made-up clicks. */
function sequence(seed: number): (limit: number) => number {
  let state = seed;
  return (limit) => {
    state = (state * 48271) % 2147483647;
    return state % limit;
  };
}

/** Clicks of `channels` channels, on average `step` ticks apart. */
function clicks(count: number, channels: number, step: number) {
  const next = sequence(12345);
  let tick = 0n;
  const ticks: bigint[] = [];
  const names: number[] = [];
  for (let i = 0; i < count; i += 1) {
    tick += BigInt(1 + next(2 * step));
    ticks.push(tick);
    names.push(next(channels));
  }
  return { ticks, channels: names };
}

describe('formats', () => {
  it('are found by their id', () => {
    for (const format of formats) expect(formatById(format.id)).toBe(format);
  });
});

describe('the layout of records is proposed from bytes alone', () => {
  const field = (firstBit: number, bits: number) => ({ firstBit, bits });
  const cases: [string, Parameters<typeof recordsLayout>[0], number, number][] = [
    ['8 bytes, 48 + 16', {}, 512, 90_000],
    [
      '8 bytes, 48 + 16, big-endian, channel below',
      { byteOrder: 'big', time: field(16, 48), channel: field(0, 16) },
      512,
      9000,
    ],
    ['8 bytes, 56 + 8', { time: field(0, 56), channel: field(56, 8) }, 200, 90_000],
    ['8 bytes, 60 + 4 below', { time: field(4, 60), channel: field(0, 4) }, 16, 90_000],
    ['10 bytes, 64 + 16', { recordBytes: 10, time: field(0, 64), channel: field(64, 16) }, 300, 500_000],
    [
      '10 bytes, big-endian',
      { recordBytes: 10, byteOrder: 'big', time: field(16, 64), channel: field(0, 16) },
      300,
      500_000,
    ],
    ['12 bytes, 64 + 32', { recordBytes: 12, time: field(0, 64), channel: field(64, 16) }, 64, 500_000],
    ['16 bytes, 64 + 64', { recordBytes: 16, time: field(0, 64), channel: field(64, 16) }, 64, 500_000],
    ['4 bytes, 24 + 8, wrapping', { recordBytes: 4, time: field(0, 24), channel: field(24, 8) }, 200, 40_000],
  ];

  it.each(cases)('%s', async (_name, parts, channels, step) => {
    const bits = parts.time?.bits ?? 48;
    const layout = recordsLayout({ ...parts, rollover: bits < 64 ? { in: 'wrap' } : { in: 'none' } });
    const tags = clicks(9000, channels, step);
    const source = memorySource(writeTags(layout, tags.ticks, tags.channels));
    const inspection = await inspectSource(source, null, nodeEnvironment);
    expect(inspection.layout).toEqual(layout);
    expect(inspection.reader).toBe('records');
    expect(inspection.because).toContain(`${layout.recordBytes} bytes`);
    expect(inspection.warnings.join(' ')).toContain('1 ps is proposed');
    if (inspection.facts.kind !== 'tags') throw new Error('expected tags');
    expect(inspection.facts.records).toBe(9000);
    expect(inspection.facts.channels.length).toBe(channels);
    const reader = await openReader(source, inspection.layout!, nodeEnvironment);
    expect(await readTags(reader)).toEqual(tags);
  });

  it.each([
    ['4 bytes, counted', 4, 'little', 21, 10, 'time-field', 900, 1n],
    ['4 bytes, big-endian, one by one', 4, 'big', 24, 7, 'one', 400_000, 1n],
    ['8 bytes, one by one', 8, 'little', 47, 16, 'one', 10 ** 9, 1001n],
  ] as const)(
    'with markers: %s',
    async (_name, recordBytes, byteOrder, timeBits, channelBits, wraps, step, stretch) => {
      const flag = field(8 * recordBytes - 1, 1);
      const period = 2n ** BigInt(timeBits);
      const layout = recordsLayout({
        recordBytes,
        byteOrder,
        time: field(0, timeBits),
        channel: field(timeBits, channelBits),
        rollover: { in: 'marker', when: [{ field: flag, equals: 1 }], advanceTick: Number(period), wraps },
      });
      const tags = clicks(30_000, 90, step);
      tags.ticks = tags.ticks.map((tick) => tick * stretch);
      const values: bigint[] = [];
      let turn = 0n;
      tags.ticks.forEach((tick, i) => {
        for (; turn < tick / period; turn += 1n)
          values.push(place(1n, flag) | place(wraps === 'one' ? 0n : 1n, layout.time));
        values.push(place(tick, layout.time) | place(BigInt(tags.channels[i]!), layout.channel));
      });
      const source = memorySource(writeRecords(layout, values));
      const inspection = await inspectSource(source, null, nodeEnvironment);
      expect(inspection.layout).toEqual(layout);
      const reader = await openReader(source, inspection.layout!, nodeEnvironment);
      expect(await readTags(reader, [7777])).toEqual(tags);
    },
  );

  it('is not proposed for noise', async () => {
    const next = sequence(99);
    const noise = Uint8Array.from({ length: 40_000 }, () => next(256));
    const inspection = await inspectSource(memorySource(noise), null, nodeEnvironment);
    expect(inspection).toMatchObject({ layout: null, facts: { kind: 'none' } });
    expect(inspection.because).toContain('describe the records');
  });
});

describe('what looks wrong is said', () => {
  it('tags out of order, and one channel only', async () => {
    const layout = recordsLayout({});
    const source = memorySource(writeTags(layout, [10n, 30n, 20n, 40n], [3, 3, 3, 3]));
    const { warnings, facts } = await inspectSource(source, layout, nodeEnvironment);
    expect(warnings).toEqual([
      expect.stringMatching(/^1 of the first 4 records lie before the one they follow, by up to 10 ticks/),
      expect.stringContaining('on one channel'),
    ]);
    expect(facts).toMatchObject({
      kind: 'tags',
      channels: [{ channel: 3, count: 4 }],
      first: [{ tick: '10', channel: 3 }, {}, {}, {}],
    });
  });

  it('only markers', async () => {
    const layout = recordsLayout({
      rollover: {
        in: 'marker',
        when: [{ field: { firstBit: 63, bits: 1 }, equals: 0 }],
        advanceTick: 5,
        wraps: 'one',
      },
    });
    const { warnings } = await inspectSource(memorySource(new Uint8Array(80)), layout, nodeEnvironment);
    expect(warnings).toEqual([expect.stringContaining('None of the first 10 records is a tag')]);
  });
});

describe('bytes that are no acquisition', () => {
  const text = new TextEncoder().encode('Dear all,\nthe run of this morning was fine.\n'.repeat(40));

  it('an empty file', async () => {
    const empty = memorySource(new Uint8Array(0), 'night.h5');
    for (const work of [
      () => inspectSource(empty, null, nodeEnvironment),
      () => openReader(empty, hdf5, nodeEnvironment),
      () => openReader(empty, recordsLayout({}), nodeEnvironment),
    ]) {
      const problem = await problemOf(work, 'empty-file');
      expect(problem.place).toBe('night.h5, byte 0');
    }
  });

  it('text named .h5, whatever the layout', async () => {
    const source = memorySource(text, 'notes.h5');
    for (const work of [
      () => inspectSource(source, null, nodeEnvironment),
      () => inspectSource(source, hdf5, nodeEnvironment),
      () => openReader(source, hdf5, nodeEnvironment),
      () => openReader(source, recordsLayout({}), nodeEnvironment),
    ]) {
      const problem = await problemOf(work, 'not-this-format');
      expect(problem.place).toBe('notes.h5, byte 0');
      expect(problem.message).toContain('text beginning "Dear all,"');
      expect(problem.message).toContain('choose the file');
    }
  });

  it.each([
    ['a gzip archive', [0x1f, 0x8b, 8, 0, 0, 0, 0, 0, 0, 3]],
    ['a PNG picture', [0x89, 0x50, 0x4e, 0x47, 13, 10, 26, 10, 0, 0]],
    ['JSON text', [...new TextEncoder().encode('{"version": 1}')]],
  ])('%s', async (what, bytes) => {
    const source = memorySource(Uint8Array.from(bytes));
    expect(
      (await problemOf(() => inspectSource(source, null, nodeEnvironment), 'not-this-format')).message,
    ).toContain(what);
  });

  it('binary bytes with a layout of HDF5', async () => {
    const source = memorySource(new Uint8Array(200), 'clicks.bin');
    expect((await problemOf(() => openReader(source, hdf5, nodeEnvironment), 'not-this-format')).place).toBe(
      'clicks.bin, byte 0',
    );
  });

  it('HDF5 with a layout of records', async () => {
    const bytes = new Uint8Array(200);
    bytes.set([0x89, 0x48, 0x44, 0x46, 0x0d, 0x0a, 0x1a, 0x0a]);
    const problem = await problemOf(
      () => openReader(memorySource(bytes, 'a.bin'), recordsLayout({}), nodeEnvironment),
      'not-this-format',
    );
    expect(problem.message).toContain('looks like HDF5');
  });

  it('records named .h5 are read as records, with a remark', async () => {
    const layout = recordsLayout({ rollover: { in: 'wrap' } });
    const tags = clicks(500, 40, 1000);
    const source = memorySource(writeTags(layout, tags.ticks, tags.channels), 'clicks.h5');
    const inspection = await inspectSource(source, null, nodeEnvironment);
    expect(inspection.layout).toEqual(layout);
    expect(inspection.warnings[0]).toBe('clicks.h5 is named like HDF5, but its bytes are not HDF5.');
  });

  it('records of the wrong length are shown with a warning and refused on opening', async () => {
    const layout = recordsLayout({ rollover: { in: 'wrap' } });
    const tags = clicks(500, 40, 1000);
    const bytes = writeTags(layout, tags.ticks, tags.channels).subarray(0, 8 * 500 - 3);
    const source = memorySource(bytes, 'clicks.bin');
    const inspection = await inspectSource(source, null, nodeEnvironment);
    expect(inspection).toMatchObject({ layout: { recordBytes: 8 }, facts: { kind: 'tags', records: 499 } });
    expect(inspection.warnings.join(' ')).toContain('499 records and 5 bytes more');
    const problem = await problemOf(() => openReader(source, layout, nodeEnvironment), 'wrong-length');
    expect(problem.place).toBe('clicks.bin, byte 3992');
    expect(problem.message).toContain('cutting it to 3992 bytes');
  });
});
