import { isDeepStrictEqual } from 'node:util';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Block } from '../../shared/contracts/blocks';
import type { RecordsLayout } from '../../shared/contracts/layout';
import { tickSpanToSeconds } from '../../shared/units/ticks';
import { createRandom } from '../../shared/util/random';
import { compileDecode } from '../../workers/formats/records/decode-fast';
import { compileGeneralDecode } from '../../workers/formats/records/decode-general';
import { createDecodeState } from '../../workers/formats/records/decode-state';
import { planRecords } from '../../workers/formats/records/plan';
import { openRecords } from '../../workers/formats/records/reader';
import { createRecordDecoding } from '../../workers/kernels/tag-decode';
import { tagKernels } from '../unit/workers/kernels/tag-kernels-compiled';
import { place, readReference, recordsLayout, writeRecords, writeTags } from './support/record-writer';
import { memorySource, never, problemOf, readTags } from './support/sources';

fc.configureGlobal({ seed: 1 });

const compiled = createRecordDecoding(await tagKernels());

const marker: RecordsLayout['rollover'] = {
  in: 'marker',
  when: [{ field: { firstBit: 31, bits: 1 }, equals: 1 }],
  advanceTick: 2 ** 25,
  wraps: 'time-field',
};

/** One layout of every kind: widths, positions, orders, rollovers, fields across word borders. */
const layouts: Record<string, RecordsLayout> = {
  '8 bytes, 48 + 16': recordsLayout({}),
  '8 bytes, big-endian, channel below': recordsLayout({
    byteOrder: 'big',
    time: { firstBit: 10, bits: 54 },
    channel: { firstBit: 0, bits: 10 },
  }),
  '8 bytes, wrapping 40 bits': recordsLayout({ time: { firstBit: 3, bits: 40 }, rollover: { in: 'wrap' } }),
  '8 bytes, wrapping 64 - 6 bits': recordsLayout({
    time: { firstBit: 0, bits: 58 },
    channel: { firstBit: 58, bits: 6 },
    rollover: { in: 'wrap' },
  }),
  '4 bytes, wrapping 24 bits': recordsLayout({
    recordBytes: 4,
    time: { firstBit: 0, bits: 24 },
    channel: { firstBit: 24, bits: 8 },
    rollover: { in: 'wrap' },
  }),
  '4 bytes, counted markers': recordsLayout({
    recordBytes: 4,
    time: { firstBit: 0, bits: 25 },
    channel: { firstBit: 25, bits: 6 },
    rollover: marker,
  }),
  '4 bytes, big-endian, single markers and skips': recordsLayout({
    recordBytes: 4,
    byteOrder: 'big',
    headerBytes: 5,
    time: { firstBit: 4, bits: 20 },
    channel: { firstBit: 24, bits: 4 },
    rollover: {
      in: 'marker',
      when: [
        { field: { firstBit: 0, bits: 4 }, equals: 15 },
        { field: { firstBit: 24, bits: 2 }, equals: 1 },
      ],
      advanceTick: 2 ** 20,
      wraps: 'one',
    },
    skip: [
      [{ field: { firstBit: 0, bits: 4 }, equals: 15 }],
      [{ field: { firstBit: 28, bits: 1 }, equals: 1 }],
    ],
  }),
  '8 bytes, markers': recordsLayout({
    time: { firstBit: 0, bits: 40 },
    channel: { firstBit: 40, bits: 8 },
    rollover: { ...marker, when: [{ field: { firstBit: 62, bits: 2 }, equals: 3 }], advanceTick: 2 ** 40 },
  }),
  '10 bytes, 64 + 16': recordsLayout({
    recordBytes: 10,
    time: { firstBit: 0, bits: 64 },
    channel: { firstBit: 64, bits: 16 },
  }),
  '10 bytes, big-endian, wrapping 64 bits': recordsLayout({
    recordBytes: 10,
    byteOrder: 'big',
    time: { firstBit: 16, bits: 64 },
    channel: { firstBit: 0, bits: 16 },
    rollover: { in: 'wrap' },
  }),
  '16 bytes, odd positions, skips': recordsLayout({
    recordBytes: 16,
    headerBytes: 64,
    time: { firstBit: 21, bits: 64 },
    channel: { firstBit: 90, bits: 12 },
    skip: [[{ field: { firstBit: 0, bits: 2 }, equals: 2 }]],
  }),
  '5 bytes, wrapping 33 bits': recordsLayout({
    recordBytes: 5,
    time: { firstBit: 0, bits: 33 },
    channel: { firstBit: 33, bits: 7 },
    rollover: { in: 'wrap' },
  }),
};

/** Whole records of any bits, or of times that rise by up to a quarter of their range. */
function recordValues(layout: RecordsLayout): fc.Arbitrary<bigint[]> {
  const width = BigInt(8 * layout.recordBytes);
  const any = fc.array(fc.bigInt({ min: 0n, max: (1n << width) - 1n }), { minLength: 1, maxLength: 40 });
  const range = 1n << BigInt(layout.time.bits);
  const step = fc.tuple(
    fc.bigInt({ min: 0n, max: range / 4n }),
    fc.nat({ max: 2 ** Math.min(layout.channel.bits, 16) - 1 }),
  );
  const rising = fc.array(step, { minLength: 1, maxLength: 60 }).map((steps) => {
    let tick = 0n;
    return steps.map(([rise, channel]) => {
      tick += rise;
      return place(tick, layout.time) | place(BigInt(channel), layout.channel);
    });
  });
  return fc.oneof(any, rising);
}

async function ticksIn(blocks: AsyncIterable<Block>): Promise<bigint[]> {
  const ticks: bigint[] = [];
  for await (const block of blocks) {
    if (block.kind !== 'tags') throw new Error('expected tags');
    for (let i = 0; i < block.count; i += 1) ticks.push(block.baseTick + BigInt(block.deltaTick[i]!));
  }
  return ticks;
}

describe.each(Object.entries(layouts))('records: %s', (_name, layout) => {
  it('decode as the contract says, whatever the cuts into ranges', async () => {
    await fc.assert(
      fc.asyncProperty(recordValues(layout), fc.array(fc.nat(), { maxLength: 3 }), async (values, cuts) => {
        const expected = readReference(layout, values);
        const inside = cuts.map((cut) => cut % (values.length + 1));
        for (const way of [undefined, compiled]) {
          const reader = openRecords(memorySource(writeRecords(layout, values)), layout, way);
          expect(await readTags(reader)).toEqual(expected);
          expect(await readTags(reader, inside)).toEqual(expected);
        }
      }),
      { numRuns: 60 },
    );
  });

  it('decode many records alike compiled and not, and tell the rollovers inside any range', async () => {
    const random = createRandom(5);
    const range = 2 ** Math.min(layout.time.bits, 50);
    let tick = 0;
    const values = Array.from({ length: 20_000 }, () => {
      tick += Math.floor(random.uniform() * random.uniform() * 0.02 * range);
      const isOdd = random.uniform() < 0.03;
      const bits = BigInt(Math.floor(random.uniform() * 2 ** 50));
      const tag =
        place(BigInt(tick) % (1n << BigInt(layout.time.bits)), layout.time) |
        place(bits % (1n << BigInt(layout.channel.bits)), layout.channel);
      return isOdd ? tag ^ (bits % (1n << BigInt(8 * layout.recordBytes))) : tag;
    });
    const source = memorySource(writeRecords(layout, values));
    const readable = openRecords(source, layout);
    const quick = openRecords(source, layout, compiled);
    const expected = await readTags(readable);
    expect(isDeepStrictEqual(await readTags(quick, [7, 16_384, 16_391]), expected)).toBe(true);
    for (const [start, end] of [
      [0, 20_000],
      [5, 5],
      [999, 18_456],
    ] as const) {
      const advance = (await quick.advanceOf?.({ start, end }, never)) ?? 0n;
      const before = await readable.tickOffsetAt(start, never);
      expect(advance).toBe((await readable.tickOffsetAt(end, never)) - before);
      const kept = await ticksIn(quick.read({ start, end }, before, never));
      const again = await ticksIn(readable.read({ start, end }, before, never));
      expect(isDeepStrictEqual(kept, again)).toBe(true);
    }
  });

  it('decode alike by the fast and the general way', () => {
    const plan = planRecords({ ...layout, skip: [] });
    fc.assert(
      fc.property(fc.uint32Array({ minLength: 4, maxLength: 64 }), (raw) => {
        const words = raw.subarray(0, raw.length - (raw.length % plan.stride));
        const one = { deltaTick: new Float64Array(64), channel: new Uint16Array(64) };
        const two = { deltaTick: new Float64Array(64), channel: new Uint16Array(64) };
        const stateOne = createDecodeState(0n);
        const stateTwo = createDecodeState(0n);
        compileDecode(plan)(words, stateOne, one);
        compileGeneralDecode(plan)(words, stateTwo, two);
        // The general way may ask for a new base earlier; what it decoded must agree.
        const both = Math.min(stateOne.count, stateTwo.count);
        expect(one.deltaTick.subarray(0, both)).toEqual(two.deltaTick.subarray(0, both));
        expect(one.channel.subarray(0, both)).toEqual(two.channel.subarray(0, both));
      }),
      { numRuns: 100 },
    );
  });
});

const wrapping32 = recordsLayout({
  time: { firstBit: 0, bits: 32 },
  channel: { firstBit: 32, bits: 8 },
  rollover: { in: 'wrap' },
});

describe('time past its limits', () => {
  it('unwraps a 32-bit counter (check value A20: derived by a loop and by a cumulative modular difference)', async () => {
    const raw = [4000000000n, 4200000000n, 100000000n, 2000000000n, 4000000000n, 5000n];
    const reader = openRecords(memorySource(writeTags(wrapping32, raw, [0, 1, 2, 3, 4, 5])), wrapping32);
    const expected = [4000000000n, 4200000000n, 4394967296n, 6294967296n, 8294967296n, 8589939592n];
    for (const cuts of [[], [2], [3], [1, 2, 3, 4, 5]])
      expect((await readTags(reader, cuts)).ticks).toEqual(expected);
  });

  it('has the rollover period of 32 bits at 1 ps (check value A21: 4.294967296 ms, arithmetic)', async () => {
    const reader = openRecords(memorySource(writeTags(wrapping32, [2n ** 32n - 1n, 0n], [0, 0])), wrapping32);
    const { ticks } = await readTags(reader);
    expect(ticks[1]).toBe(2n ** 32n);
    expect(Math.abs(1e3 * tickSpanToSeconds(ticks[1]!, 1000) - 4.294967296)).toBeLessThan(1e-9);
  });

  it('stays exact past 2^53 ps (check value A22: 9007.199254740992 s, IEEE 754-2019)', async () => {
    const limit = 2n ** 53n;
    expect(Math.abs(tickSpanToSeconds(limit, 1000) - 9007.199254740992)).toBeLessThan(1e-6);
    const layout = layouts['10 bytes, 64 + 16']!;
    const ticks = [limit - 1n, limit, limit + 1n, limit + 3n];
    const reader = openRecords(memorySource(writeTags(layout, ticks, [1, 2, 3, 4])), layout);
    expect((await readTags(reader)).ticks).toEqual(ticks);
  });

  it('counts a day at 1 ps through its rollovers exactly', async () => {
    // 86400 s at 1 ps = 8.64e16 ticks, 78580 turns of a 40-bit counter; four tags a turn.
    const layout = layouts['8 bytes, wrapping 40 bits']!;
    const quarter = 2n ** 38n;
    const day = 86_400n * 10n ** 12n;
    const ticks = Array.from(
      { length: Number(day / quarter) },
      (_, i) => BigInt(i) * quarter + BigInt(i % 7),
    );
    const channels = ticks.map((_, i) => i % 256);
    const reader = openRecords(memorySource(writeTags(layout, ticks, channels)), layout);
    const read = await readTags(reader, [100_000, 100_001, 222_222]);
    const wrong = read.ticks.findIndex((tick, i) => tick !== ticks[i]);
    expect([wrong, read.ticks.length]).toEqual([-1, ticks.length]);
    expect(read.ticks.at(-1)! > 2n ** 56n).toBe(true);
  });

  it('goes on over the borders of blocks', async () => {
    const layout = layouts['4 bytes, wrapping 24 bits']!;
    const records = 2 ** 21 + 3;
    const step = 5_000_001;
    const words = Uint32Array.from(
      { length: records },
      (_, i) => ((i * step) % 2 ** 24) + (i % 200) * 2 ** 24,
    );
    const reader = openRecords(memorySource(new Uint8Array(words.buffer)), layout);
    let blocks = 0;
    let bytes = 0;
    let wrong = 0;
    for await (const block of reader.read({ start: 0, end: records }, 0n, never)) {
      if (block.kind !== 'tags') continue;
      const base = Number(block.baseTick);
      for (let i = 0; i < block.count; i += 1) {
        const record = block.firstRecord + i;
        if (base + block.deltaTick[i]! !== record * step || block.channel[i] !== record % 200) wrong += 1;
      }
      blocks += 1;
      bytes += block.bytes;
    }
    expect({ wrong, bytes }).toEqual({ wrong: 0, bytes: 4 * records });
    expect(blocks).toBeGreaterThan(2);
    const start = 2 ** 20 + 77;
    const known = BigInt(start * step) - (BigInt(start * step) % 2n ** 24n);
    // What was scanned before is not read again, and the answer is the same.
    let scanned = 0;
    const count = (scannedBytes: number): void => {
      scanned += scannedBytes;
    };
    const before = (BigInt((start - 1) * step) / 2n ** 24n) * 2n ** 24n;
    expect(await reader.tickOffsetAt(start, never, count)).toBe(before);
    expect(scanned).toBe(4 * start);
    expect(await reader.tickOffsetAt(start, never, count)).toBe(before);
    expect(scanned).toBe(4 * start);
    expect(known - before === 0n || known - before === 2n ** 24n).toBe(true);
  });

  it('jumps by rollovers larger than a double holds', async () => {
    const layout = recordsLayout({
      ...layouts['8 bytes, markers'],
      rollover: { ...marker, when: [{ field: { firstBit: 62, bits: 2 }, equals: 3 }], advanceTick: 2 ** 52 },
    });
    const mark = 3n << 62n;
    const values = [5n, mark | 1000n, 6n, mark | 1n, mark | 1n, 7n];
    for (const way of [undefined, compiled]) {
      const reader = openRecords(memorySource(writeRecords(layout, values)), layout, way);
      expect((await readTags(reader)).ticks).toEqual(readReference(layout, values).ticks);
    }
  });
});

describe('what is wrong with records', () => {
  it('names where the odd bytes start', async () => {
    const layout = layouts['16 bytes, odd positions, skips']!;
    const source = memorySource(new Uint8Array(64 + 16 * 3 + 5), 'run.bin');
    const problem = await problemOf(() => openRecords(source, layout), 'wrong-length');
    expect(problem.place).toBe('run.bin, byte 112');
    expect(problem.message).toContain('3 records and 5 bytes more');
  });

  it('refuses a header longer than the file', async () => {
    const layout = recordsLayout({ headerBytes: 100 });
    const problem = await problemOf(
      () => openRecords(memorySource(new Uint8Array(40), 'a'), layout),
      'wrong-length',
    );
    expect(problem.place).toBe('a, byte 40');
  });

  it('refuses fields outside the record and conditions that never hold', async () => {
    const outside = recordsLayout({ channel: { firstBit: 60, bits: 8 } });
    expect((await problemOf(() => planRecords(outside), 'bad-layout')).place).toBe('channel');
    const impossible = recordsLayout({ skip: [[{ field: { firstBit: 0, bits: 2 }, equals: 4 }]] });
    expect((await problemOf(() => planRecords(impossible), 'bad-layout')).place).toBe('skip');
  });

  it('refuses channels past 65535 and ranges outside the file', async () => {
    const layout = recordsLayout({ time: { firstBit: 0, bits: 32 }, channel: { firstBit: 32, bits: 32 } });
    const reader = openRecords(memorySource(writeTags(layout, [1n], [70000]), 'c'), layout);
    expect((await problemOf(() => readTags(reader), 'bad-layout')).message).toContain('70000');
    await problemOf(() => reader.read({ start: 0, end: 2 }, 0n, never), 'bad-input');
    await problemOf(() => reader.tickOffsetAt(3, never), 'bad-input');
  });

  it('says when the file became shorter while it was read', async () => {
    const layout = recordsLayout({});
    const whole = memorySource(new Uint8Array(80), 'shrunk');
    const reader = openRecords({ ...whole, read: (start) => whole.read(start, start + 12) }, layout);
    expect((await problemOf(() => readTags(reader), 'truncated')).place).toBe('shrunk, byte 12');
  });
});
