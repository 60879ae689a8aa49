import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createClockMap, mapTick } from '../../workers/formats/clock-map';
import { openClockPair } from '../../workers/formats/clock-pair';
import { openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { recordsLayout, writeTags } from './support/record-writer';
import { memorySource, problemOf, readTags } from './support/sources';

const textLayout = {
  version: 1,
  format: 'text',
  kind: 'tags',
  delimiter: 'semicolon',
  decimal: 'point',
  headerLines: 0,
  timeColumn: 1,
  channelColumn: 0,
  timeUnitFs: 1000,
  tickFs: 1000,
} as const;
const wide = { time: { firstBit: 0, bits: 52 }, channel: { firstBit: 52, bits: 12 } };

async function file(name: string, ticks: readonly bigint[], channels: readonly number[], tickFs: number) {
  const layout = recordsLayout({ ...wide, headerBytes: 8, tickFs });
  const bytes = writeTags(layout, ticks, channels);
  return {
    name,
    reader: await openReader(memorySource(bytes, name), layout, nodeEnvironment),
    bytes: bytes.length,
  };
}

/** Companion ticks moved in exact fractions; halves up. Drift and offset are whole numbers of 2^-30 and ticks. */
function moved(tick: bigint, drift: bigint, offset: bigint, [n, d]: [bigint, bigint]): bigint {
  const numerator = 2n * tick * n * (2n ** 30n + drift) + d * 2n ** 30n;
  const denominator = 2n * d * 2n ** 30n;
  const quotient = numerator / denominator;
  return (numerator % denominator < 0n ? quotient - 1n : quotient) + offset;
}

describe('tags of two clocks', () => {
  const steps = fc.array(fc.nat(2 ** 34), { maxLength: 60 });
  const rising = (given: readonly number[]): bigint[] => {
    let tick = 0n;
    return given.map((step) => {
      tick += BigInt(step);
      return tick;
    });
  };

  it('come in time order, moved exactly, in any ranges', async () => {
    const cases = fc.record({
      a: steps,
      b: steps,
      drift: fc.integer({ min: -100_000, max: 100_000 }),
      offset: fc.integer({ min: -1_000_000, max: 1_000_000 }),
      ratio: fc.constantFrom<[number, number]>([1000, 1000], [4000, 1000], [1000, 250]),
      cuts: fc.array(fc.nat(120), { maxLength: 3 }),
    });
    await fc.assert(
      fc.asyncProperty(cases, async ({ a, b, drift, offset, ratio, cuts }) => {
        const [ticksA, ticksB] = [rising(a), rising(b)];
        const [fsB, fsA] = ratio;
        const main = await file(
          'main',
          ticksA,
          a.map((_, i) => i),
          fsA,
        );
        const companion = await file(
          'companion',
          ticksB,
          b.map((_, i) => i),
          fsB,
        );
        const clock = { offsetPs: (offset * fsA) / 1000, drift: drift / 2 ** 30 };
        const reader = await openClockPair(main, companion, { channelOffset: 2000, clock });
        const wanted = [
          ...ticksA.map((tick, i) => ({ tick, channel: i })),
          ...ticksB.map((tick, i) => ({
            tick: moved(tick, BigInt(drift), BigInt(offset), [BigInt(fsB), BigInt(fsA)]),
            channel: 2000 + i,
          })),
        ].sort((x, y) => (x.tick === y.tick ? x.channel - y.channel : x.tick < y.tick ? -1 : 1));
        const inside = cuts.map((cut) => Math.min(cut, wanted.length));
        const tags = await readTags(reader, inside);
        expect(tags.ticks).toEqual(wanted.map(({ tick }) => tick));
        expect(tags.channels).toEqual(wanted.map(({ channel }) => channel));
      }),
      { numRuns: 150 },
    );
  });

  it('are cut at the same places whatever the ranges, over many pages', async () => {
    const count = 150_000;
    const a = Array.from({ length: count }, (_, i) => BigInt(i) * 1009n + BigInt((i * 7919) % 500));
    const b = Array.from({ length: count / 2 }, (_, i) => BigInt(i) * 2003n + BigInt((i * 104_729) % 900));
    const main = await file(
      'main',
      a,
      a.map((_, i) => i % 5),
      1000,
    );
    const companion = await file(
      'companion',
      b,
      b.map((_, i) => i % 7),
      1000,
    );
    const clock = { offsetPs: -54_321, drift: 3e-6 };
    const reader = await openClockPair(main, companion, { channelOffset: 100, clock });
    expect(reader.facts).toMatchObject({ records: 225_000 });
    const whole = await readTags(reader);
    expect(whole.ticks.every((tick, i) => i === 0 || tick >= whole.ticks[i - 1]!)).toBe(true);
    expect(await readTags(reader, [1, 70_000, 98_304, 150_001, 224_999])).toEqual(whole);
  });

  it('come in short blocks when the second file is far denser and longer than the first', async () => {
    const channelOf = (ticks: readonly bigint[]) => ticks.map((_, i) => i % 3);
    const a = Array.from({ length: 50 }, (_, i) => BigInt(i) * 3_000_001n + 40n);
    const b = Array.from({ length: 250_000 }, (_, i) => BigInt(i) * 1009n + BigInt((i * 7919) % 1000));
    const main = await file('main', a, channelOf(a), 1000);
    const companion = await file('companion', b, channelOf(b), 1000);
    const clock = { offsetPs: 0, drift: 0 };
    const reader = await openClockPair(main, companion, { channelOffset: 100, clock });
    const wanted = [
      ...a.map((tick, i) => ({ tick, channel: i % 3 })),
      ...b.map((tick, i) => ({ tick, channel: 100 + (i % 3) })),
    ].sort((x, y) => (x.tick === y.tick ? x.channel - y.channel : x.tick < y.tick ? -1 : 1));
    for (const cuts of [[], [7, 65_536, 65_590, 131_072, 249_999]]) {
      const { ticks, channels } = await readTags(reader, cuts);
      expect(ticks.every((tick, i) => tick === wanted[i]!.tick)).toBe(true);
      expect(channels.every((channel, i) => channel === wanted[i]!.channel)).toBe(true);
      expect(ticks.length).toBe(wanted.length);
    }
    let longest = 0;
    for await (const block of reader.read({ start: 0, end: wanted.length }, 0n, { cancelled: false })) {
      longest = Math.max(longest, block.count);
    }
    expect(longest).toBeLessThanOrEqual(2 * 2 ** 16);
  });

  it('stay exact where few tags span more than doubles hold', async () => {
    // 3000 tags over 38 hours of 1 ps, then a long silence.
    const a = Array.from(
      { length: 3000 },
      (_, i) => BigInt(i) * 45_678_901_234_567n + (i > 2000 ? 2n ** 61n : 0n),
    );
    const b = a.map((tick) => tick + 3n);
    const open = async (name: string, all: readonly bigint[]) => {
      const bytes = new TextEncoder().encode(all.map((tick) => `0;${tick}\n`).join(''));
      const reader = await openReader(memorySource(bytes, name), textLayout, nodeEnvironment);
      return { name, reader, bytes: bytes.length };
    };
    const clock = { offsetPs: 0, drift: 0 };
    const main = await open('main', a);
    const reader = await openClockPair(main, await open('companion', b), { channelOffset: 1, clock });
    const { ticks, channels } = await readTags(reader, [777, 4001]);
    expect(ticks).toEqual(a.flatMap((tick) => [tick, tick + 3n]));
    expect(channels).toEqual(a.flatMap(() => [0, 1]));
  });

  it('keep what the drift adds beside an offset of weeks', () => {
    // 2^60 ticks of 1 ps: doubles there are 256 ticks apart; a drift of 2^-20 adds 2^20 ticks a cell of 2^40.
    const map = createClockMap(1000, 1000, { offsetPs: 2 ** 60, drift: 2 ** -20 });
    for (const cell of [0n, 1n, 3n, 70n]) {
      for (const inside of [0n, 2n ** 20n, 5n * 2n ** 20n]) {
        const tick = (cell << 40n) + inside;
        expect(mapTick(map, tick)).toBe(2n ** 60n + tick + (tick >> 20n));
      }
    }
    const odd = createClockMap(1000, 1000, { offsetPs: 2 ** 60, drift: 2 ** -36 });
    for (const cell of [1n, 2n, 3n, 9n])
      expect(mapTick(odd, cell << 40n) - (cell << 40n)).toBe(2n ** 60n + 16n * cell);
  });

  it('channels that pass 65535 are refused', async () => {
    const main = await file('main', [1n], [0], 1000);
    const companion = await file('companion', [1n], [7], 1000);
    const reader = await openClockPair(main, companion, {
      channelOffset: 65_530,
      clock: { offsetPs: 0, drift: 0 },
    });
    const problem = await problemOf(() => readTags(reader), 'bad-input');
    expect(problem.message).toContain('found 7 + 65530');
  });
});
