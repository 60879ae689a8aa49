import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { openClockPair } from '../../workers/formats/clock-pair';
import { openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { recordsLayout, writeTags } from './support/record-writer';
import { memorySource, problemOf, readTags } from './support/sources';

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
