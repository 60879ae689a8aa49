import { describe, expect, it } from 'vitest';
import type { FrameSpec, FrameTally } from '../../../../shared/contracts/tally';
import { createRandom } from '../../../../shared/util/random';
import {
  createFrameAccumulator,
  type FrameAccumulator,
  frameAccumulatorFromPart,
} from '../../../../workers/accumulators/frame-accumulator';
import type { FrameExports, FrameWasm } from '../../../../workers/kernels/frame-wasm';
import { instantiateWasm } from '../../../../workers/kernels/wasm-module';
import { compileKernels } from '../../../../workers/pipeline/kernels-node';

const compiled = await compileKernels('frames');
if (compiled === null) throw new Error('build the kernels first: npm run build:wasm');
const wasm = await instantiateWasm<FrameExports>(compiled);

const width = 18;
const height = 13;
const frames = 60;
const spec: FrameSpec = {
  kind: 'frames',
  width,
  height,
  frames,
  blocks: 7,
  masked: Uint8Array.from({ length: width * height }, (_, i) => (i % 50 === 9 ? 1 : 0)),
};
const random = createRandom(5);
const stack = Uint16Array.from({ length: frames * width * height }, () => 100 + 40 * random.uniform());

function push(into: FrameAccumulator, start: number, end: number): void {
  const pixels = stack.subarray(start * width * height, end * width * height);
  into.push({ kind: 'frames', firstFrame: start, count: end - start, width, height, pixels, bytes: 0 });
}

function counted(kernels: FrameWasm | null, given = spec): FrameTally {
  const accumulator = createFrameAccumulator(given, kernels);
  push(accumulator, 0, frames);
  return accumulator.tally();
}

const mostOf = (map: ArrayLike<number>) =>
  Array.from(map).reduce((most, v) => Math.max(most, Math.abs(v)), 0);

function expectClose(got: FrameTally, wanted: FrameTally): void {
  const names = ['sum', 'sumSquares', 'diagonal', 'jointX', 'jointY', 'plus', 'minus'] as const;
  for (const name of names) {
    const off = mostOf(wanted[name].map((v, i) => v - got[name][i]!));
    expect(off, name).toBeLessThanOrEqual(
      (name === 'plus' || name === 'minus' ? 1e-6 : 1e-12) * mostOf(wanted[name]),
    );
  }
  for (const name of ['blockPlus', 'blockMinus'] as const) {
    wanted[name].forEach((map, b) => {
      const off = mostOf(map!.map((v, i) => v - got[name][b]![i]!));
      expect(off, `${name} ${b}`).toBeLessThanOrEqual(1e-6 * mostOf(wanted.blockMinus[b]!));
    });
  }
  expect([got.blockFrames, got.blockTotals, got.blockDifferences]).toEqual([
    wanted.blockFrames,
    wanted.blockTotals,
    wanted.blockDifferences,
  ]);
}

describe('frames counted by compiled kernels', () => {
  it('are those counted readably, also treated and normalised', () => {
    expectClose(counted(wasm), counted(null));
    const treated = { ...spec, offset: 110, threshold: 12 };
    expectClose(counted(wasm, treated), counted(null, treated));
    const normalised = { ...spec, normalised: true };
    expectClose(counted(wasm, normalised), counted(null, normalised));
  });

  it('do not mind that two accumulators take turns with one module', () => {
    const one = createFrameAccumulator(spec, wasm);
    const other = createFrameAccumulator({ ...spec, offset: 3 }, wasm);
    for (let at = 0; at < frames; at += 5) {
      push(one, at, at + 5);
      push(other, at, at + 5);
    }
    expectClose(one.tally(), counted(null));
    expectClose(other.tally(), counted(null, { ...spec, offset: 3 }));
  });

  it('come out bit by bit the same from the same chunks, whoever looks on the way', () => {
    const cuts = [0, 11, 30, 31, 60];
    const merged = (look: boolean): FrameTally => {
      const into = createFrameAccumulator(spec, wasm);
      for (let c = 0; c + 1 < cuts.length; c++) {
        const chunk = createFrameAccumulator(spec, wasm);
        push(chunk, cuts[c]!, cuts[c + 1]!);
        into.merge(frameAccumulatorFromPart(spec, chunk.toPart()));
        if (look) into.tally();
      }
      return into.tally();
    };
    expect(merged(true)).toEqual(merged(false));
    expectClose(merged(true), counted(null));
  });

  it('leave a tally as it was when counting goes on', () => {
    const accumulator = createFrameAccumulator(spec, wasm);
    push(accumulator, 0, 20);
    const early = accumulator.tally();
    const before = structuredClone(early);
    push(accumulator, 20, 60);
    expect(early).toEqual(before);
    expect(accumulator.tally().frames).toBe(60);
  });

  it('keep of large maps a window around the middle, block by block', () => {
    const small = { ...spec, blockSide: 9 };
    const whole = counted(wasm);
    const cut = counted(wasm, small);
    const { x, y, nx, ny } = cut.blockWindow;
    expect([x, y, nx, ny]).toEqual([13, 8, 9, 9]);
    expect(cut.plus).toEqual(whole.plus);
    for (let b = 0; b < spec.blocks; b++) {
      for (let i = 0; i < 81; i++) {
        const at = (y + Math.floor(i / 9)) * (2 * width - 1) + x + (i % 9);
        expect(cut.blockMinus[b]![i]).toBe(whole.blockMinus[b]![at]);
        expect(cut.blockPlus[b]![i]).toBe(whole.blockPlus[b]![at]);
      }
    }
  });

  it('refuse to normalise a frame without light', () => {
    const dark = createFrameAccumulator({ ...spec, normalised: true, threshold: 60_000 }, wasm);
    expect(() => push(dark, 0, 3)).toThrow(/Frame 0 has a total of 0.*normalisation off/);
  });
});
