import { describe, expect, it } from 'vitest';
import type { TagSpec, TagTally } from '../../../../shared/contracts/tally';
import { createRandom, type Random } from '../../../../shared/util/random';
import { isKeepable, PairCache } from '../../../../workers/accumulators/pair-cache';
import {
  createTagAccumulator,
  type TagAccumulator,
  tagAccumulatorFromPart,
} from '../../../../workers/accumulators/tag-accumulator';
import { transferablesOf } from '../../../../workers/accumulators/transferables';
import { cutRanges, mergeAnyOrder } from './merge-any';
import { armSpec, type RawTag, tagBlock } from './tag-twin';

/** The law: counting the kept pairs again gives what counting the tags gives, in every field. */
const RANGE = { minTauTick: -700, maxTauTick: 900 };

interface Scene {
  tags: RawTag[];
  base: bigint;
  delays: number[];
  tickFs: number;
}

function scene(random: Random): Scene {
  const tickFs = [1000, 1e6, 3e7][random.below(3)]!;
  const gap = [4, 300, 20_000, 3e7][random.below(4)]!;
  let tick = [0n, -40_000n, 2n ** 60n][random.below(3)]!;
  const base = tick;
  const tags: RawTag[] = [];
  for (let i = random.below(500); i > 0; i--) {
    tick += BigInt(Math.floor(random.exponential() * gap * random.uniform()));
    const channel = [random.below(6), 10 + random.below(8), 99][random.below(5) % 3]!;
    tags.push({ tick: tick - BigInt(random.below(30)), channel });
  }
  const delays = random.below(2) === 0 ? [] : [3, 0, -20, 5, 0, 7, 1, 2];
  return { tags, base, delays, tickFs };
}

function specOf({ delays, tickFs }: Scene, masked: [number[], number[]], random: Random): TagSpec {
  const binTick = 1 + random.below(90);
  const bins = random.below(8) === 0 ? 0 : 1 + random.below(Math.floor(1500 / binTick));
  const loTick = RANGE.minTauTick + random.below(1601 - bins * binTick);
  const width = 1 + random.below(160);
  const inside = (): number => RANGE.minTauTick + random.below(1601 - width);
  const lo = inside();
  return {
    kind: 'tags',
    tickFs,
    a: armSpec(3, 2, 0, { masked: masked[0], delays }),
    b: armSpec(2, 4, 10, { masked: masked[1], delays }),
    histogram: { loTick, binTick, bins },
    window:
      random.below(6) === 0
        ? null
        : {
            loTick: lo,
            hiTick: lo + width - 1,
            shiftsTick: Array.from({ length: random.below(5) }, () => inside() - lo),
          },
  };
}

function count(spec: TagSpec, { tags, base }: Scene, random: Random): TagAccumulator {
  const cuts = (): number[] => Array.from({ length: random.below(5) }, () => random.below(1000));
  const ranges = cutRanges(tags.length, cuts()).map(({ start, stop }) => {
    const accumulator = createTagAccumulator(spec);
    for (const piece of cutRanges(stop - start, cuts())) {
      accumulator.push(tagBlock(tags.slice(start + piece.start, start + piece.stop), base));
    }
    const part = accumulator.toPart();
    return tagAccumulatorFromPart(spec, structuredClone(part, { transfer: transferablesOf(part) }));
  });
  const picks = Array.from({ length: 3 }, () => random.below(9));
  return mergeAnyOrder(ranges, picks, (left, right) => {
    left.merge(right);
    return left;
  });
}

function cacheOf(accumulator: TagAccumulator, spec: TagSpec): PairCache {
  const kept = accumulator.kept();
  if (kept === null) throw new Error('kept pairs were expected');
  return new PairCache(spec, RANGE, accumulator.tally(), kept);
}

function countOnce(spec: TagSpec, { tags, base }: Scene): TagTally {
  const accumulator = createTagAccumulator(spec);
  accumulator.push(tagBlock(tags, base));
  return accumulator.tally();
}

describe('pair cache', () => {
  it('counts any window, shifts, histogram and mask as the tags do, however they were cut', () => {
    let masked = 0;
    for (let seed = 0; seed < 16; seed++) {
      const random = createRandom(seed);
      const given = scene(random);
      const first = specOf(given, [[], []], random);
      const spec: TagSpec = { ...first, keepPairs: RANGE };
      const counted = count(spec, given, random);
      expect(counted.tally()).toEqual(countOnce(first, given));
      const cache = cacheOf(counted, spec);
      for (let n = 0; n < 6; n++) {
        const asked = specOf(given, [[], []], random);
        expect(cache.recount(asked)).toEqual(countOnce(asked, given));
        const pick = (pixels: number): number[] =>
          Array.from({ length: random.below(4) }, () => random.below(pixels));
        const hidden = specOf(given, [pick(6), pick(8)], random);
        const recounted = cache.recount(hidden);
        if (recounted === null) continue;
        masked += 1;
        expect(recounted).toEqual(countOnce(hidden, given));
      }
    }
    // Refused only where delays spread less without the masked pixels, or the slices get shorter.
    expect(masked).toBeGreaterThan(60);
  });

  it('says that the bytes are needed for anything it did not keep', () => {
    const random = createRandom(5);
    const base = 0n;
    const tags = Array.from({ length: 40 }, (_, i) => ({
      tick: BigInt(20 * i),
      channel: i % 2 === 0 ? 1 : 12,
    }));
    const given: Scene = { tags, base, delays: [], tickFs: 1000 };
    const window = { loTick: 0, hiTick: 30, shiftsTick: [200] };
    const asked: TagSpec = { ...specOf(given, [[], []], random), window };
    const spec: TagSpec = { ...asked, keepPairs: RANGE };
    const cache = cacheOf(count(spec, given, random), spec);
    expect(cache.recount(asked)).not.toBeNull();
    const beyond = { ...asked.histogram, loTick: RANGE.minTauTick - 1 };
    const { a } = asked;
    const others: TagSpec[] = [
      { ...asked, histogram: beyond },
      { ...asked, window: { ...window, shiftsTick: [871] } },
      { ...asked, tickFs: 2000 },
      { ...asked, a: armSpec(6, 1, 0) },
      { ...asked, a: armSpec(3, 2, 1) },
      { ...asked, a: { ...a, delayTickOfChannel: a.delayTickOfChannel.map((_, i) => (i === 1 ? 1 : 0)) } },
    ];
    for (const other of others) expect(cache.recount(other)).toBeNull();
    const late = [...tags, { tick: -6_000_000_000n, channel: 1 }];
    const disordered = count(spec, { ...given, tags: late }, random);
    expect(isKeepable(disordered.tally())).toBe(false);
  });

  it('holds what was kept when it was made, however far the counting goes on', () => {
    const random = createRandom(8);
    const given = scene(random);
    const asked = specOf(given, [[], []], random);
    const spec: TagSpec = { ...asked, keepPairs: RANGE };
    const half = Math.floor(given.tags.length / 2);
    const part = (tags: RawTag[]): TagAccumulator => {
      const accumulator = createTagAccumulator(spec);
      accumulator.push(tagBlock(tags, given.base));
      return tagAccumulatorFromPart(spec, accumulator.toPart());
    };
    const whole = createTagAccumulator(spec);
    whole.merge(part(given.tags.slice(0, half)));
    const cache = cacheOf(whole, spec);
    whole.merge(part(given.tags.slice(half)));
    const other = specOf(given, [[], []], random);
    expect(cache.recount(other)).toEqual(countOnce(other, { ...given, tags: given.tags.slice(0, half) }));
    expect(cacheOf(whole, spec).recount(other)).toEqual(countOnce(other, given));
  });

  it('forgets the pairs when a range without them is merged in, and goes on counting', () => {
    const random = createRandom(6);
    const given = scene(random);
    const asked = specOf(given, [[], []], random);
    const half = Math.floor(given.tags.length / 2);
    const left = createTagAccumulator({ ...asked, keepPairs: RANGE });
    left.push(tagBlock(given.tags.slice(0, half), given.base));
    const right = createTagAccumulator(asked);
    right.push(tagBlock(given.tags.slice(half), given.base));
    left.merge(right);
    expect(left.kept()).toBeNull();
    expect(left.tally()).toEqual(countOnce(asked, given));
  });
});
