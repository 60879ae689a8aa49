import { isDeepStrictEqual } from 'node:util';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { TagSpec } from '../../../../shared/contracts/tally';
import { slicesOfSlots, wholeStretches } from '../../../../workers/accumulators/pair-cache-store';
import {
  createTagAccumulator,
  type TagAccumulator,
  tagAccumulatorFromPart,
} from '../../../../workers/accumulators/tag-accumulator';
import type { TagPart } from '../../../../workers/accumulators/tag-part';
import { transferablesOf } from '../../../../workers/accumulators/transferables';
import type { TagWasm } from '../../../../workers/kernels/tag-wasm';
import { tagKernels } from '../kernels/tag-kernels-compiled';
import { cutRanges, mergeAnyOrder } from './merge-any';
import { armSpec, type RawTag, slowTagTally, tagBlock } from './tag-twin';

fc.configureGlobal({ seed: 1 });

/** A tick of 1 ns: the horizon of 5 ms is 5 million ticks. */
const NS_FS = 1e6;

const plainSpec = (over: Partial<TagSpec> = {}): TagSpec => ({
  kind: 'tags',
  tickFs: NS_FS,
  a: armSpec(3, 2, 0),
  b: armSpec(2, 4, 10),
  histogram: { loTick: -15, binTick: 5, bins: 6 },
  window: { loTick: -5, hiTick: 5, shiftsTick: [8, 20, -20] },
  ...over,
});

const delays = fc.array(fc.integer({ min: -40, max: 40 }), { minLength: 8, maxLength: 8 });
const masked = fc.subarray([0, 3, 5]);
interface Case {
  bucket: boolean;
  tickFs: number;
  scale: number;
  maskedA: number[];
  maskedB: number[];
  delaysA: number[];
  delaysB: number[];
  histogram: { loTick: number; binTick: number; bins: number };
  window: { loTick: number; width: number; shiftsTick: number[] } | null;
  start: bigint;
  gap: number;
  events: { step: number; back: number; channel: number }[];
}

/** Slices are numbered in doubles, so the far start goes with ticks of at most 1 ns (a span of 146 years). */
const clocks = fc.oneof(
  fc.record({
    tickFs: fc.constantFrom(1e3, NS_FS),
    start: fc.constantFrom(2n ** 53n + 1n, 2n ** 62n, 86_399n * 10n ** 12n),
  }),
  fc.record({ tickFs: fc.constantFrom(1e3, NS_FS, 1e9, 1e12), start: fc.constantFrom(0n, -300n, 77n) }),
);
const cases: fc.Arbitrary<Case> = fc
  .tuple(
    clocks,
    fc.record({
      bucket: fc.boolean(),
      scale: fc.constantFrom(1, 7, 900),
      maskedA: masked,
      maskedB: masked,
      delaysA: delays,
      delaysB: delays,
      histogram: fc.record({
        loTick: fc.integer({ min: -40, max: 20 }),
        bins: fc.integer({ min: 0, max: 12 }),
        binTick: fc.integer({ min: 1, max: 9 }),
      }),
      window: fc.option(
        fc.record({
          loTick: fc.integer({ min: -20, max: 10 }),
          width: fc.integer({ min: 0, max: 25 }),
          shiftsTick: fc.array(fc.integer({ min: -60, max: 60 }), { maxLength: 4 }),
        }),
      ),
      gap: fc.constantFrom(0, 1, 4, 60, 4000, 3_000_000),
      events: fc.array(
        fc.record({
          step: fc.double({ min: 0, max: 1, noNaN: true }),
          back: fc.nat(50),
          channel: fc.constantFrom(0, 1, 2, 3, 4, 5, 10, 11, 12, 13, 14, 15, 16, 17, 99),
        }),
        { maxLength: 90, size: 'max' },
      ),
    }),
  )
  .map(([clock, rest]) => ({ ...clock, ...rest }));

function specOf(given: Case): TagSpec {
  const { scale, histogram, window } = given;
  return {
    kind: 'tags',
    tickFs: given.tickFs,
    a: given.bucket ? armSpec(1, 1, 0) : armSpec(3, 2, 0, { masked: given.maskedA, delays: given.delaysA }),
    b: armSpec(2, 4, 10, { masked: given.maskedB, delays: given.delaysB }),
    histogram: { loTick: histogram.loTick * scale, binTick: histogram.binTick * scale, bins: histogram.bins },
    window: window && {
      loTick: window.loTick * scale,
      hiTick: (window.loTick + window.width) * scale,
      shiftsTick: window.shiftsTick.map((shift) => shift * scale),
    },
  };
}

/** Times that wander forward by gaps of one scale and back by at most the horizon of 5 ms. */
function tagsOf({ tickFs, start, gap, events }: Case): RawTag[] {
  const horizon = Math.ceil(5e12 / tickFs);
  let tick = start;
  return events.map(({ step, back, channel }) => {
    tick += BigInt(Math.round(step * gap));
    return { tick: tick - BigInt(Math.min(back, horizon)), channel };
  });
}

function counted(
  spec: TagSpec,
  tags: RawTag[],
  blockSizes: number[],
  baseBack: bigint,
  kernels: TagWasm | null = null,
  leastBits = 0,
): TagAccumulator {
  const accumulator = createTagAccumulator(spec, kernels, leastBits);
  for (let at = 0, turn = 0; at < tags.length; turn++) {
    const size = blockSizes[turn % blockSizes.length]!;
    const piece = tags.slice(at, at + size);
    accumulator.push(tagBlock(piece, piece[0]!.tick - baseBack, at));
    at += size;
  }
  return accumulator;
}

function cloned(spec: TagSpec, accumulator: TagAccumulator): TagAccumulator {
  const part = accumulator.toPart();
  const moved: TagPart = structuredClone(part, { transfer: transferablesOf(part) });
  return tagAccumulatorFromPart(spec, moved);
}

const blockSizes = fc.array(fc.integer({ min: 1, max: 40 }), { minLength: 1, maxLength: 5 });

describe('tag accumulator', () => {
  it('equals the double loop for any chunking', () => {
    fc.assert(
      fc.property(cases, blockSizes, fc.bigInt(0n, 99n), (given, sizes, back) => {
        const spec = specOf(given);
        const tags = tagsOf(given);
        expect(counted(spec, tags, sizes, back).tally()).toEqual(slowTagTally(spec, tags));
      }),
      { numRuns: 400 },
    );
  });

  it('equals the double loop for any split into ranges, merged in any association', () => {
    const cuts = fc.array(fc.nat(200), { minLength: 1, maxLength: 4 });
    const picks = fc.array(fc.nat(20), { minLength: 1, maxLength: 4 });
    fc.assert(
      fc.property(cases, blockSizes, cuts, picks, (given, sizes, cutAt, order) => {
        const spec = specOf(given);
        const tags = tagsOf(given);
        const ranges = cutRanges(tags.length, cutAt).map(({ start, stop }) =>
          counted(spec, tags.slice(start, stop), sizes, 0n),
        );
        const merged = mergeAnyOrder(ranges, order, (left, right) => {
          const into = cloned(spec, left);
          into.merge(cloned(spec, right));
          return into;
        });
        expect(merged.tally()).toEqual(slowTagTally(spec, tags));
      }),
      { numRuns: 400 },
    );
  });

  it('goes on counting after a look, a part and a merge', () => {
    const spec = plainSpec();
    const tags = Array.from({ length: 60 }, (_, i) => ({
      tick: BigInt(i * 3 - (i % 5)),
      channel: i % 2 === 0 ? i % 6 : 10 + (i % 8),
    }));
    const accumulator = counted(spec, tags.slice(0, 20), [7], 0n);
    accumulator.tally();
    const part = accumulator.toPart();
    structuredClone(part, { transfer: transferablesOf(part) });
    accumulator.merge(counted(spec, tags.slice(20, 40), [20], 5n));
    accumulator.push(tagBlock(tags.slice(40), 1000n));
    expect(accumulator.tally()).toEqual(slowTagTally(spec, tags));
  });

  it('leaves the range that is merged in as it was', () => {
    const spec = plainSpec();
    const next = counted(spec, [{ tick: 9n, channel: 11 }], [1], 0n);
    const before = next.tally();
    const accumulator = counted(spec, [{ tick: 7n, channel: 2 }], [1], 0n);
    accumulator.merge(next);
    accumulator.push(tagBlock([{ tick: 1_000_000_000n, channel: 3 }], 1_000_000_000n));
    expect(next.tally()).toEqual(before);
  });
});

/** Every kept pair as one number (delay, pixels, slice of the tally), in order. */
function keptPairs(accumulator: TagAccumulator, { a, b, keepPairs }: TagSpec): Float64Array {
  const { sliceTick, firstSlice, slices } = accumulator.tally();
  const keys = (accumulator.kept()?.stores ?? []).flatMap((store) => {
    const sliceOf = slicesOfSlots(Math.log2(sliceTick) - store.bits, store.firstSlice);
    return [...wholeStretches(store)].flatMap(({ stretch: { start, stop }, bucketTick }) =>
      Array.from({ length: stop - start }, (_, n) => {
        const i = start + n;
        const tau = (keepPairs?.minTauTick ?? 0) + bucketTick + store.offset[i]!;
        const pixels = store.pixelA[i]! + a.width * a.height * store.pixelB[i]!;
        const slice = sliceOf[store.slot[i]!]! - firstSlice;
        return (tau * a.width * a.height * b.width * b.height + pixels) * slices + slice;
      }),
    );
  });
  return Float64Array.from(keys).sort();
}

describe('compiled tag accumulator', () => {
  it('equals the double loop for any chunking and split', async () => {
    const left = await tagKernels();
    const right = await tagKernels();
    fc.assert(
      fc.property(cases, blockSizes, fc.nat(90), fc.boolean(), (given, sizes, cutAt, isMoved) => {
        const spec = specOf(given);
        const tags = tagsOf(given);
        const cut = Math.min(cutAt, tags.length);
        const first = counted(spec, tags.slice(0, cut), sizes, 3n, left);
        const second = counted(spec, tags.slice(cut), sizes, 0n, right);
        const whole = isMoved ? cloned(spec, first) : first;
        whole.merge(isMoved ? cloned(spec, second) : second);
        expect(whole.tally()).toEqual(slowTagTally(spec, tags));
        first.release();
        second.release();
      }),
      { numRuns: 250 },
    );
  });

  it('gives the module back where the machine has no room for it', async () => {
    const kernels = await tagKernels();
    const spec = plainSpec({ a: armSpec(3, 2, 0) });
    const { mark } = kernels;
    const place = kernels.place.bind(kernels);
    let left = 3;
    kernels.place = (bytes) => {
      if (left-- === 0) throw new RangeError('no more memory');
      return place(bytes);
    };
    expect(() => createTagAccumulator(spec, kernels)).toThrow('no more memory');
    expect(kernels.mark).toBe(mark);
    kernels.place = place;
    const next = createTagAccumulator(spec, kernels);
    expect(kernels.mark).toBeGreaterThan(mark);
    next.release();
    expect(kernels.mark).toBe(mark);
  });

  it('equals the readable one over many pieces, with candidates that fill their columns again and again', async () => {
    const kernels = await tagKernels();
    let state = 12345;
    const random = (): number => {
      state = (Math.imul(state, 1103515245) + 12345) >>> 0;
      return state / 2 ** 32;
    };
    for (const [gap, disorder] of [
      [40, 0],
      [3, 0],
      [40, 5000],
    ] as const) {
      const spec = plainSpec({
        tickFs: 1000,
        a: armSpec(3, 2, 0, { delays: [0, 3, -7, 11, 0, 2] }),
        histogram: { loTick: -100, binTick: 7, bins: 29 },
        window: { loTick: -5, hiTick: 5, shiftsTick: [20, -30, 70] },
        keepPairs: { minTauTick: -50, maxTauTick: 60 },
      });
      let tick = 86_399n * 10n ** 12n;
      const tags = Array.from({ length: 60_000 }, () => {
        tick += BigInt(Math.floor(random() * gap));
        const channel = random() < 0.5 ? Math.floor(random() * 6) : 10 + Math.floor(random() * 9);
        return { tick: tick - BigInt(Math.floor(random() * disorder)), channel };
      });
      const compiled = counted(spec, tags, [20_000, 1, 3000], 9n, kernels);
      const readable = counted(spec, tags, [5000], 9n);
      expect(isDeepStrictEqual(compiled.tally(), readable.tally())).toBe(true);
      expect(compiled.tally().prompt.pairs.reduce((sum, n) => sum + n, 0)).toBeGreaterThan(500);
      expect(isDeepStrictEqual(keptPairs(compiled, spec), keptPairs(readable, spec))).toBe(true);
      expect(compiled.kept()?.stores.length).toBeGreaterThan(gap === 3 ? 1 : 0);
      compiled.release();
    }
  });

  it('takes blocks that lie in its own memory as they are, while the memory grows', async () => {
    const kernels = await tagKernels();
    const spec = plainSpec();
    const tags = Array.from({ length: 40_000 }, (_, i) => ({
      tick: BigInt(i * 3),
      channel: i % 2 === 0 ? i % 6 : 10 + (i % 8),
    }));
    const { mark } = kernels;
    const deltaAt = kernels.place(8 * tags.length);
    const channelAt = kernels.place(2 * tags.length);
    const outside = tagBlock(tags, 0n);
    kernels.f64(deltaAt, tags.length).set(outside.deltaTick);
    kernels.u16(channelAt, tags.length).set(outside.channel);
    const inside = {
      ...outside,
      deltaTick: kernels.f64(deltaAt, tags.length),
      channel: kernels.u16(channelAt, tags.length),
    };
    const accumulator = createTagAccumulator(spec, kernels);
    const held = createTagAccumulator(spec);
    // Placed after the views were made: they may have ended.
    accumulator.push({
      ...inside,
      deltaTick: kernels.f64(deltaAt, tags.length),
      channel: kernels.u16(channelAt, tags.length),
    });
    held.push(outside);
    expect(accumulator.tally()).toEqual(held.tally());
    accumulator.release();
    expect(kernels.mark).toBeGreaterThan(mark);
    kernels.release(mark);
  });

  it('leaves a module that another holds alone', async () => {
    const kernels = await tagKernels();
    const spec = plainSpec();
    const first = createTagAccumulator(spec, kernels);
    const { mark } = kernels;
    const second = createTagAccumulator(spec, kernels);
    second.push(tagBlock([{ tick: 5n, channel: 1 }], 0n));
    expect(kernels.mark).toBe(mark);
    expect(second.tally().tags).toBe(1);
    first.release();
    expect(kernels.mark).toBeLessThan(mark);
  });
});

describe('slices that begin coarse', () => {
  it('end as those that grew, for parts of a run that needs them', () => {
    fc.assert(
      fc.property(cases, blockSizes, fc.nat(200), (given, sizes, cutAt) => {
        const spec = specOf(given);
        const tags = tagsOf(given);
        const whole = slowTagTally(spec, tags);
        const cut = cutAt % (tags.length + 1);
        const merged = counted(spec, tags.slice(0, cut), sizes, 0n);
        // The coordinator has merged what came before: its slices are at least that long in the end.
        const leastBits = merged.sliceBits;
        merged.merge(counted(spec, tags.slice(cut), sizes, 0n, null, leastBits));
        expect(merged.tally()).toEqual(whole);
      }),
      { numRuns: 150 },
    );
  });
});

describe('tag accumulator, edges', () => {
  const spec = plainSpec();

  it('says nothing of an empty file', () => {
    const empty = createTagAccumulator(spec);
    empty.push(tagBlock([], 5n));
    empty.merge(createTagAccumulator(spec));
    expect(empty.tally()).toEqual(slowTagTally(spec, []));
  });

  it('takes one tag', () => {
    const tags = [{ tick: 123n, channel: 4 }];
    expect(counted(spec, tags, [1], 0n).tally()).toEqual(slowTagTally(spec, tags));
  });

  it('pairs every A with every B when all tags are at one tick', () => {
    const tags = Array.from({ length: 40 }, (_, i) => ({ tick: 5n, channel: i % 2 === 0 ? 1 : 12 }));
    const tally = counted(spec, tags, [7], 0n).tally();
    expect(tally.prompt.pairs[0]).toBe(400);
    expect(tally).toEqual(slowTagTally(spec, tags));
  });

  it('counts a pair of equal times across a border once', () => {
    const left = counted(spec, [{ tick: 50n, channel: 1 }], [1], 0n);
    left.merge(counted(spec, [{ tick: 50n, channel: 11 }], [1], 0n));
    expect(left.tally().histogram.counts[3]).toBe(1);
    expect(left.tally().prompt.pairs).toEqual(Float64Array.of(1));
  });

  it('gives the histogram of check A03 in either file order', () => {
    // Check A03: derived here by numerics; verified by double loop and numpy.histogram.
    const start = [0n, 10n, 20n, 30n].map((tick) => ({ tick, channel: 0 }));
    const stop = [1n, 12n, 29n, 33n].map((tick) => ({ tick, channel: 10 }));
    for (const tags of [
      [...start, ...stop],
      [...stop, ...start],
    ]) {
      const { counts } = counted(spec, tags, [3], 0n).tally().histogram;
      expect([...counts]).toEqual([0, 2, 1, 3, 1, 2]);
    }
  });

  it('holds 24 hours at 1 ps', () => {
    const day = 86_400_000_000_000_000n;
    const psSpec = plainSpec({ tickFs: 1000 });
    const tags: RawTag[] = [];
    for (let i = 0n; i <= 200n; i++) {
      const tick = (day * i) / 200n;
      tags.push({ tick, channel: Number(i % 6n) }, { tick: tick + 3n, channel: 10 + Number(i % 8n) });
    }
    const tally = counted(psSpec, tags, [2, 3], 0n).tally();
    expect(tally).toEqual(slowTagTally(psSpec, tags));
    expect(tally.prompt.pairs.reduce((sum, n) => sum + n, 0)).toBe(201);
    expect(tally.slices).toBeGreaterThan(64);
  });

  it('counts tags later than the horizon and keeps their singles', () => {
    const tags = [0n, 9_000_000n, 1n].map((tick, i) => ({ tick, channel: i === 2 ? 10 : 0 }));
    const tally = counted(spec, tags, [3], 0n).tally();
    expect(tally.outOfOrder).toBe(1);
    expect(tally.b.singles[0]).toBe(1);
    const split = counted(spec, tags.slice(0, 2), [2], 0n);
    split.merge(counted(spec, tags.slice(2), [1], 0n));
    expect(split.tally().outOfOrder).toBe(1);
  });

  it('refuses a channel in both arms, ticks that are not whole and parts of another run', () => {
    expect(() => createTagAccumulator(plainSpec({ b: armSpec(2, 2, 3) }))).toThrow(/both arms/);
    const histogram = { loTick: 0, binTick: 0.5, bins: 4 };
    expect(() => createTagAccumulator(plainSpec({ histogram }))).toThrow(/whole ticks/);
    const part = createTagAccumulator(spec).toPart();
    expect(() => tagAccumulatorFromPart(plainSpec({ window: null }), part)).toThrow(/parts of one run/);
    const newer = { ...part, part: 2 } as unknown as TagPart;
    expect(() => tagAccumulatorFromPart(spec, newer)).toThrow(/version 2/);
  });
});
