import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { FrameSpec, FrameTally } from '../../../../shared/contracts/tally';
import { accumulatorFromPart, createAccumulator } from '../../../../workers/accumulators/accumulator';
import {
  createFrameAccumulator,
  type FrameAccumulator,
  frameAccumulatorFromPart,
} from '../../../../workers/accumulators/frame-accumulator';
import type { FramePart } from '../../../../workers/accumulators/frame-part';
import { transferablesOf } from '../../../../workers/accumulators/transferables';
import { frameBlock, projections, slowCovariance, slowFrameTally } from './frame-twin';
import { cutRanges, mergeAnyOrder } from './merge-any';
import { armSpec, tagBlock } from './tag-twin';

fc.configureGlobal({ seed: 1 });

const cases = fc
  .record({
    width: fc.integer({ min: 1, max: 5 }),
    height: fc.integer({ min: 1, max: 4 }),
    blocks: fc.integer({ min: 1, max: 5 }),
    count: fc.nat(14),
    maskedEvery: fc.constantFrom(0, 3, 4),
    top: fc.constantFrom(1, 3, 4095),
  })
  .chain((shape) => {
    const pixel = fc.nat(shape.top);
    const pixels = shape.width * shape.height;
    const frame = fc.array(pixel, { minLength: pixels, maxLength: pixels });
    return fc.record({
      shape: fc.constant(shape),
      frames: fc.array(frame, { minLength: shape.count, maxLength: shape.count }),
    });
  });
type Case = typeof cases extends fc.Arbitrary<infer T> ? T : never;

function specOf({ shape, frames }: Case): FrameSpec {
  const { width, height, blocks, maskedEvery } = shape;
  const masked = Uint8Array.from({ length: width * height }, (_, i) =>
    maskedEvery > 0 && i % maskedEvery === 1 ? 1 : 0,
  );
  return { kind: 'frames', width, height, frames: Math.max(1, frames.length), blocks, masked };
}

function summed(spec: FrameSpec, frames: number[][], start: number, sizes: number[]): FrameAccumulator {
  const accumulator = createFrameAccumulator(spec);
  for (let at = 0, turn = 0; at < frames.length; turn++) {
    const size = sizes[turn % sizes.length]!;
    accumulator.push(frameBlock(spec, frames.slice(at, at + size), start + at));
    at += size;
  }
  return accumulator;
}

function cloned(spec: FrameSpec, accumulator: FrameAccumulator): FrameAccumulator {
  const part = accumulator.toPart();
  const moved: FramePart = structuredClone(part, { transfer: transferablesOf(part) });
  return frameAccumulatorFromPart(spec, moved);
}

const largest = (map: ArrayLike<number>) =>
  Array.from(map).reduce((most, value) => Math.max(most, Math.abs(value)), 0);
type BlockMaps = FrameTally['blockPlus'];
const largestBlock = (maps: BlockMaps) =>
  Math.max(0, ...maps.map((map) => (map === null ? 0 : largest(map))));

/**
 * Numbers equal, maps within 1e-12 of their largest value, block maps, which are kept in single precision, within 3e-7.
 * The totals are block maps plus the end-frame correction and may cancel to nothing, so for them the largest value of the
 * block maps counts too, as the own pairs do for the block maps.
 */
function expectClose(got: FrameTally, wanted: FrameTally): void {
  expect(Object.keys(got).sort()).toEqual(Object.keys(wanted).sort());
  const own = Math.max(largest(wanted.diagonal), largestBlock(wanted.blockMinus));
  const parts: Partial<Record<string, number>> = { plus: largestBlock(wanted.blockPlus), minus: own };
  for (const key of ['blockPlus', 'blockMinus'] as const) {
    wanted[key].forEach((map, b) => {
      const other = got[key][b] ?? null;
      expect(other === null, `${key} ${b}`).toBe(map === null);
      if (map === null || other === null) return;
      const off = largest(map.map((v, i) => v - other[i]!));
      expect(off, `${key} ${b}`).toBeLessThanOrEqual(3e-7 * Math.max(largest(map), own));
    });
  }
  for (const [key, value] of Object.entries(wanted)) {
    if (key === 'blockPlus' || key === 'blockMinus') continue;
    const other: unknown = got[key as keyof FrameTally];
    if (!(value instanceof Float64Array)) {
      expect(other).toEqual(value);
      continue;
    }
    const map = other as Float64Array;
    expect(map.length).toBe(value.length);
    const scale = Math.max(largest(value), parts[key] ?? 0);
    const off = largest(value.map((v, i) => v - map[i]!));
    expect(off, key).toBeLessThanOrEqual(1e-12 * scale);
  }
}

const sizes = fc.array(fc.integer({ min: 1, max: 5 }), { minLength: 1, maxLength: 4 });

describe('frame accumulator', () => {
  it('equals the matrices of the estimator for any chunking, and so does every look on the way', () => {
    fc.assert(
      fc.property(cases, sizes, fc.nat(14), (given, chunk, lookAt) => {
        const spec = specOf(given);
        const wanted = slowFrameTally(spec, given.frames);
        expectClose(summed(spec, given.frames, 0, chunk).tally(), wanted);
        const early = given.frames.slice(0, lookAt);
        const accumulator = summed(spec, early, 0, chunk);
        expectClose(accumulator.tally(), slowFrameTally(spec, early));
        accumulator.push(frameBlock(spec, given.frames.slice(lookAt), lookAt));
        if (lookAt <= given.frames.length) expectClose(accumulator.tally(), wanted);
      }),
    );
  });

  it('equals them for any split into ranges, merged in any association', () => {
    const cuts = fc.array(fc.nat(30), { minLength: 1, maxLength: 4 });
    const picks = fc.array(fc.nat(20), { minLength: 1, maxLength: 4 });
    fc.assert(
      fc.property(cases, sizes, cuts, picks, (given, chunk, cutAt, order) => {
        const spec = specOf(given);
        const ranges = cutRanges(given.frames.length, cutAt).map(({ start, stop }) =>
          summed(spec, given.frames.slice(start, stop), start, chunk),
        );
        const merged = mergeAnyOrder(ranges, order, (left, right) => {
          const into = cloned(spec, left);
          into.merge(cloned(spec, right));
          return into;
        });
        expectClose(merged.tally(), slowFrameTally(spec, given.frames));
      }),
    );
  });

  it('gives the symmetrised matrix of check B09', () => {
    // Check B09: derived here by numerics; verified by matrix product and loops.
    const frames = [
      [1, 0, 2],
      [0, 1, 1],
      [2, 1, 0],
      [1, 2, 1],
    ];
    const gamma = [
      [1, -1, -1 / 3],
      [-1 / 3, -1 / 3, 0],
      [0, -2 / 3, 1],
    ];
    const times3 = gamma.map((row, i) => row.map((value, j) => (3 * (value + gamma[j]![i]!)) / 2));
    const spec: FrameSpec = {
      kind: 'frames',
      width: 3,
      height: 1,
      frames: 4,
      blocks: 2,
      masked: new Uint8Array(3),
    };
    const tally = summed(spec, frames, 0, [4]).tally();
    const wanted = projections(times3, 3, 1);
    // One row: the joint map in x is the matrix itself.
    expect([...tally.jointX].every((v, i) => Math.abs(v - times3.flat()[i]!) <= 1e-12)).toBe(true);
    for (const key of ['plus', 'minus', 'jointY', 'diagonal'] as const) {
      expect(tally[key].length).toBe(wanted[key].length);
      tally[key].forEach((value, i) => {
        expect(Math.abs(value - wanted[key][i]!), `${key} ${i}`).toBeLessThanOrEqual(1e-12);
      });
    }
    expect([...tally.blockFrames, ...tally.blockDifferences]).toEqual([2, 2, 2, 1]);
  });

  it('keeps the difference map symmetric to the last bit', () => {
    fc.assert(
      fc.property(cases, (given) => {
        const { minus } = summed(specOf(given), given.frames, 0, [3]).tally();
        expect(minus).toEqual(minus.slice().reverse());
      }),
      { numRuns: 30 },
    );
  });

  it('takes stretches with a gap between them, closes the gap later, and leaves the merged range alone', () => {
    const spec: FrameSpec = {
      kind: 'frames',
      width: 2,
      height: 2,
      frames: 9,
      blocks: 3,
      masked: new Uint8Array(4),
    };
    const frames = Array.from({ length: 9 }, (_, l) => [l % 3, (l * l) % 5, 7 - l, (3 * l) % 4]);
    const early = summed(spec, frames.slice(0, 3), 0, [2]);
    const late = summed(spec, frames.slice(6), 6, [2]);
    early.merge(late);
    const open = early.tally();
    const { plus } = projections(slowCovariance([frames.slice(0, 3), frames.slice(6)], 4), 2, 2);
    expect(open.differences).toBe(4);
    open.plus.forEach((value, i) => {
      expect(Math.abs(value - plus[i]!)).toBeLessThanOrEqual(1e-10);
    });
    const before = late.tally();
    early.push(frameBlock(spec, frames.slice(3, 6), 3));
    expectClose(early.tally(), slowFrameTally(spec, frames));
    expect(late.tally()).toEqual(before);
  });

  it('never reads what a masked pixel holds', () => {
    const masked = Uint8Array.of(0, 1);
    const spec: FrameSpec = { kind: 'frames', width: 2, height: 1, frames: 3, blocks: 1, masked };
    const frames = [
      [1, Number.NaN],
      [3, 9e99],
      [2, Number.NaN],
    ];
    const tally = summed(spec, frames, 0, [3]).tally();
    expect([...tally.plus, ...tally.sum].every(Number.isFinite)).toBe(true);
    expectClose(tally, slowFrameTally(spec, frames));
  });

  it('refuses frames of another size and parts of another stack', () => {
    const spec: FrameSpec = {
      kind: 'frames',
      width: 2,
      height: 1,
      frames: 3,
      blocks: 1,
      masked: new Uint8Array(2),
    };
    const accumulator = createFrameAccumulator(spec);
    expect(() => accumulator.push(frameBlock({ ...spec, width: 1 }, [[1]], 0))).toThrow(
      /2 x 1 were expected/,
    );
    const part = accumulator.toPart();
    expect(() => frameAccumulatorFromPart({ ...spec, frames: 4 }, part)).toThrow(/parts of one run/);
    const newer = { ...part, part: 3 } as unknown as FramePart;
    expect(() => frameAccumulatorFromPart(spec, newer)).toThrow(/version 3/);
  });
});

describe('frames with pixels that are no numbers', () => {
  const spec = (masked: number[] = []): FrameSpec => ({
    kind: 'frames',
    width: 4,
    height: 3,
    frames: 6,
    blocks: 2,
    masked: Uint8Array.from({ length: 12 }, (_, k) => (masked.includes(k) ? 1 : 0)),
  });
  const block = (odd: number) => {
    const pixels = new Float32Array(4 * 12).fill(1);
    // Third of four frames from number 2 on, pixel (2, 1).
    pixels[2 * 12 + 6] = odd;
    return { kind: 'frames' as const, firstFrame: 2, count: 4, width: 4, height: 3, pixels, bytes: 0 };
  };

  it.each([Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY])(
    'refuses %s, by its place',
    (odd) => {
      const push = () => createAccumulator(spec()).push(block(odd));
      expect(push).toThrow(
        /Frame 4 holds (NaN|-?Infinity) at pixel \(2, 1\).*mask pixel 6 in the detector map/,
      );
    },
  );

  it('takes them where they are masked', () => {
    const accumulator = createAccumulator(spec([6]));
    accumulator.push(block(Number.NaN));
    const tally = accumulator.tally();
    if (tally.kind !== 'frames') throw new Error('frames expected');
    expect([...tally.sum]).toEqual(Array.from({ length: 12 }, (_, k) => (k === 6 ? 0 : 4)));
  });
});

describe('accumulators of either kind', () => {
  const frames: FrameSpec = {
    kind: 'frames',
    width: 2,
    height: 1,
    frames: 3,
    blocks: 1,
    masked: new Uint8Array(2),
  };
  const tags = {
    kind: 'tags' as const,
    tickFs: 1000,
    a: armSpec(1, 1, 0),
    b: armSpec(2, 1, 1),
    histogram: { loTick: 0, binTick: 1, bins: 2 },
    window: null,
  };

  it('are made from the specification and from parts', () => {
    for (const spec of [frames, tags]) {
      const accumulator = createAccumulator(spec);
      expect(accumulator.kind).toBe(spec.kind);
      expect(accumulatorFromPart(spec, accumulator.toPart()).tally()).toEqual(accumulator.tally());
    }
  });

  it('refuse blocks, ranges and parts of the other kind', () => {
    const ofTags = createAccumulator(tags);
    const ofFrames = createAccumulator(frames);
    expect(() => ofTags.push(frameBlock(frames, [[1, 2]], 0))).toThrow(/Time tags were expected/);
    expect(() => ofFrames.push(tagBlock([], 0n))).toThrow(/Frames were expected/);
    expect(() => ofTags.merge(ofFrames)).toThrow(/tag counts/);
    expect(() => ofFrames.merge(ofTags)).toThrow(/frame sums/);
    expect(() => accumulatorFromPart(tags, ofFrames.toPart())).toThrow(/A part of tags/);
  });
});
