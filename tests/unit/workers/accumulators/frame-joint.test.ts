import { describe, expect, it } from 'vitest';
import type { FrameSpec, FrameTally } from '../../../../shared/contracts/tally';
import { createRandom } from '../../../../shared/util/random';
import {
  createFrameAccumulator,
  type FrameAccumulator,
  frameAccumulatorFromPart,
} from '../../../../workers/accumulators/frame-accumulator';
import { assertWholePart } from '../../../../workers/accumulators/whole-part';
import type { FrameExports, FrameWasm } from '../../../../workers/kernels/frame-wasm';
import { instantiateWasm } from '../../../../workers/kernels/wasm-module';
import { compileKernels } from '../../../../workers/pipeline/kernels-node';

const compiled = await compileKernels('frames');
if (compiled === null) throw new Error('build the kernels first: npm run build:wasm');
const wasm = await instantiateWasm<FrameExports>(compiled);
const kernels: [string, FrameWasm | null][] = [
  ['readable', null],
  ['compiled', wasm],
];

function push(
  into: FrameAccumulator,
  spec: FrameSpec,
  stack: Uint16Array | Float64Array,
  from: number,
  to: number,
) {
  const { width, height } = spec;
  const pixels = stack.subarray(from * width * height, to * width * height);
  into.push({ kind: 'frames', firstFrame: from, count: to - from, width, height, pixels, bytes: 0 });
}

const small: FrameSpec = {
  kind: 'frames',
  width: 4,
  height: 3,
  frames: 9,
  blocks: 3,
  masked: new Uint8Array(12),
  jointRegion: { x0: 1, y0: 1, x1: 3, y1: 2 },
};
const smallStack = Uint16Array.from({ length: 9 * 12 }, (_, k) => {
  const l = Math.floor(k / 12);
  const i = k % 12;
  return (7 * l * l + 3 * l * i + 5 * i) % 11;
});
/**
 * NumPy 1.24: R = I[:, 1:3, 1:4].reshape(9, 6); D = R[:-1] - R[1:];
 * G = D.T @ D / 2 + (outer(R[0], R[0]) - outer(R[-1], R[-1])) / 2, its rows from the diagonal on.
 */
const fromNumPy = [
  128, -15.5, -115, -6, 15.5, -67.5, 85, -23.5, -4, -41, -34, 90, -2, 12.5, 38, 24, 9.5, 0.5, 118, -43, 95,
];

const spec: FrameSpec = {
  kind: 'frames',
  width: 14,
  height: 11,
  frames: 300,
  blocks: 7,
  masked: Uint8Array.from({ length: 14 * 11 }, (_, i) => (i % 31 === 9 ? 1 : 0)),
  jointRegion: { x0: 2, y0: 3, x1: 10, y1: 9 },
};
const random = createRandom(6);
const bright = Uint16Array.from({ length: 300 * 14 * 11 }, () => 100 + random.poisson(30));
const sparse = bright.map(() => (random.uniform() < 0.05 ? 1 : 0));

function tallyOf(given: FrameSpec, stack: Uint16Array, use: FrameWasm | null): FrameTally {
  const accumulator = createFrameAccumulator(given, use);
  push(accumulator, given, stack, 0, given.frames);
  return accumulator.tally();
}

/** Largest distance over the largest value. */
function distance(got: Float64Array | undefined, wanted: Float64Array | undefined): number {
  if (got === undefined || wanted === undefined || got.length !== wanted.length) return Number.NaN;
  const most = (values: Float64Array) => values.reduce((m, v) => Math.max(m, Math.abs(v)), 0);
  return most(got.map((v, k) => v - wanted[k]!)) / most(wanted);
}

describe('Joint distribution of a region of frames', () => {
  it.each(kernels)('%s: is that of NumPy, end frames corrected', (_, use) => {
    const tally = tallyOf(small, smallStack, use);
    expect([...tally.joint!]).toEqual(fromNumPy);
    expect(tally.jointRegion).toEqual(small.jointRegion);
  });

  it.each([
    ['bright', spec, bright],
    ['sparse', spec, sparse],
    ['thresholded', { ...spec, offset: 100, threshold: 36 }, bright],
    ['scaled to the mean total', { ...spec, offset: 99.5, normalised: true }, bright],
  ] as const)('compiled and readable agree: %s', (_, given, stack) => {
    expect(distance(tallyOf(given, stack, wasm).joint, tallyOf(given, stack, null).joint)).toBeLessThan(1e-6);
  });

  it('adds up to what the maps over both coordinates hold', () => {
    // The region is the whole frame: its sum over all pairs is that of the difference map.
    const whole = { ...spec, jointRegion: { x0: 0, y0: 0, x1: 13, y1: 10 } };
    const { joint, minus } = tallyOf(whole, bright, wasm);
    let sum = 0;
    let at = 0;
    for (let i = 0; i < 154; i++) for (let j = i; j < 154; j++) sum += (i === j ? 1 : 2) * joint![at++]!;
    const all = minus.reduce((total, v) => total + v, 0);
    expect(Math.abs(sum - all)).toBeLessThan(1e-5 * joint![0]! * 154);
  });

  it.each(kernels)(
    '%s: ranges merge in any order, by way of parts, with frames counted by looks',
    (_, use) => {
      const wanted = tallyOf(spec, bright, use).joint;
      const ranges = [0, 70, 71, 190, 300];
      const parts = ranges.slice(1).map((end, k) => {
        const accumulator = createFrameAccumulator(spec, use);
        push(accumulator, spec, bright, ranges[k]!, end);
        if (k === 2) accumulator.tally();
        return accumulator.toPart();
      });
      const merged = createFrameAccumulator(spec, use);
      for (const k of [2, 0, 3, 1]) merged.merge(frameAccumulatorFromPart(spec, parts[k]!, use));
      expect(distance(merged.tally().joint, wanted)).toBeLessThan(1e-6);
      for (const part of parts) expect(() => assertWholePart(spec, part)).not.toThrow();
    },
  );

  it('of two accumulators on one module stay apart', () => {
    const [one, two] = [createFrameAccumulator(spec, wasm), createFrameAccumulator(spec, wasm)];
    for (let l = 0; l < 300; l += 50) {
      push(one, spec, bright, l, l + 50);
      push(two, spec, sparse, l, l + 50);
    }
    expect(distance(one.tally().joint, tallyOf(spec, bright, null).joint)).toBeLessThan(1e-6);
    expect(distance(two.tally().joint, tallyOf(spec, sparse, null).joint)).toBeLessThan(1e-6);
  });

  it('of another region does not merge, and a part without it is not whole', () => {
    const part = createFrameAccumulator({ ...spec, jointRegion: null }).toPart();
    expect(() => frameAccumulatorFromPart(spec, part)).toThrow(/another stack/);
    expect(() => assertWholePart(spec, part)).toThrow(/not whole/);
    expect(part.totals.joint).toBeUndefined();
    expect(createFrameAccumulator({ ...spec, jointRegion: null }).tally().joint).toBeUndefined();
  });
});
