import { describe, expect, it } from 'vitest';
import type { PixelArray } from '../../../../shared/contracts/blocks';
import { createRandom } from '../../../../shared/util/random';
import { borrowFrameKernels } from '../../../../workers/kernels/frame-loans';
import { type FrameMaps, type FrameShape, ReadableFrameMaps } from '../../../../workers/kernels/frame-maps';
import { CompiledFrameMaps } from '../../../../workers/kernels/frame-maps-wasm';
import type { FrameExports } from '../../../../workers/kernels/frame-wasm';
import { instantiateWasm } from '../../../../workers/kernels/wasm-module';
import { compileKernels } from '../../../../workers/pipeline/kernels-node';

const compiled = await compileKernels('frames');
if (compiled === null) throw new Error('build the kernels first: npm run build:wasm');
const wasm = await instantiateWasm<FrameExports>(compiled);

const types = [
  Uint8Array,
  Int8Array,
  Uint16Array,
  Int16Array,
  Float32Array,
  Uint32Array,
  Int32Array,
  Float64Array,
] as const;

function shapeOf(width: number, height: number, more: Partial<FrameShape> = {}): FrameShape {
  const masked = Uint8Array.from({ length: width * height }, (_, i) => (i % 11 === 4 ? 1 : 0));
  return { width, height, masked, offset: 0, threshold: null, normalised: false, ...more };
}

function fill<T extends PixelArray>(pixels: T, level: number): T {
  const random = createRandom(pixels.length);
  for (let i = 0; i < pixels.length; i++) pixels[i] = level + 100 * random.uniform();
  return pixels;
}

function sumsOf(maps: FrameMaps, { width, height }: FrameShape, pixels: PixelArray, frames: number) {
  const lights = Array.from({ length: frames }, (_, k) => maps.take(pixels, k * width * height));
  const last = maps.last();
  const { plus, minus, diagonal } = maps.close();
  const closed = { plus: plus.slice(), minus: minus.slice(), diagonal };
  const sums = {
    sum: new Float64Array(width * height),
    sumSquares: new Float64Array(width * height),
    jointX: new Float64Array(width * width),
    jointY: new Float64Array(height * height),
  };
  maps.drain(sums);
  return { ...closed, ...sums, last, totals: Float64Array.from(lights, ({ total }) => total) };
}

function expectTwins(shape: FrameShape, pixels: PixelArray, frames: number): void {
  const mark = wasm.mark;
  const got = sumsOf(new CompiledFrameMaps(wasm, shape), shape, pixels, frames);
  const wanted = sumsOf(new ReadableFrameMaps(shape), shape, pixels, frames);
  wasm.release(mark);
  for (const key of Object.keys(wanted) as (keyof typeof wanted)[]) {
    const scale = wanted[key].reduce((most, v) => Math.max(most, Math.abs(v)), 0);
    const off = wanted[key].reduce((most, v, i) => Math.max(most, Math.abs(v - got[key][i]!)), 0);
    // The transform of the maps is f32; all else is f64.
    expect(off, key).toBeLessThanOrEqual((key === 'plus' || key === 'minus' ? 1e-6 : 1e-12) * scale);
  }
}

describe('compiled frame maps', () => {
  it.each(types.map((type) => [type.name, type] as const))(
    'are those of the readable twin: %s',
    (_, Type) => {
      expectTwins(shapeOf(13, 9), fill(new Type(21 * 13 * 9), Type === Int8Array ? -50 : 0), 21);
    },
  );

  it.each([
    [1, 1, 4],
    [2, 1, 9],
    [8, 8, 1],
    [16, 16, 66],
    [33, 20, 12],
    [20, 33, 12],
    [64, 64, 10],
    [70, 5, 7],
  ])('are those of the readable twin: %i x %i, %i frames', (width, height, frames) => {
    expectTwins(shapeOf(width, height), fill(new Uint16Array(frames * width * height), 4000), frames);
  });

  it.each([
    [1, 0],
    [3, 0],
    [1, 0.4],
  ])('count pairs where few pixels are lit: up to %i, dense in %f of the frames', (most, dense) => {
    const shape = shapeOf(40, 30);
    const random = createRandom(9);
    const pixels = new Uint16Array(50 * 1200);
    for (let k = 0; k < 50; k++) {
      const lit = random.uniform() < dense ? 600 : 25;
      for (let i = 0; i < lit; i++) pixels[k * 1200 + random.below(1200)] = 1 + random.below(most);
    }
    expectTwins(shape, pixels, 50);
  });

  it('count pairs exactly, and without overflow', () => {
    const shape = shapeOf(16, 16);
    const pixels = new Uint16Array(40 * 256);
    for (let k = 0; k < 40; k++) for (let i = 0; i < 6; i++) pixels[k * 256 + 40 * i + k] = 4095 - k;
    const mark = wasm.mark;
    const got = sumsOf(new CompiledFrameMaps(wasm, shape), shape, pixels, 40);
    wasm.release(mark);
    const wanted = sumsOf(new ReadableFrameMaps(shape), shape, pixels, 40);
    // Six pixels of 4000 squared over 40 frames do not fit 32 bits.
    expect(Math.max(...wanted.minus)).toBeGreaterThan(2 ** 31);
    wanted.minus.forEach((v, i) => {
      expect(got.minus[i]).toBe(Math.round(2 * v) / 2 + 0);
    });
  });

  it('keep small fluctuations of large numbers', () => {
    expectTwins(shapeOf(8, 8), fill(new Uint32Array(9 * 64), 4e9), 9);
  });

  it.each([
    [{ offset: 30 }],
    [{ offset: 30.25 }],
    [{ threshold: 60 }],
    [{ offset: 10, threshold: 50.5 }],
    [{ normalised: true }],
    [{ offset: 0.5, threshold: 20, normalised: true }],
  ])('treat pixels as the readable twin does: %o', (treatment) => {
    const shape = shapeOf(12, 10, treatment);
    expectTwins(shape, fill(new Uint16Array(12 * 120), 0), 12);
    expectTwins(shape, fill(new Float32Array(12 * 120), 0), 12);
  });

  it('turn from f32 to f64 in the middle of a run', () => {
    const shape = shapeOf(6, 5);
    const narrow = fill(new Uint16Array(5 * 30), 0);
    const wide = fill(new Float64Array(5 * 30), 0);
    const mark = wasm.mark;
    const [got, wanted] = [new CompiledFrameMaps(wasm, shape), new ReadableFrameMaps(shape)].map((maps) => {
      for (let k = 0; k < 5; k++) maps.take(narrow, 30 * k);
      for (let k = 0; k < 5; k++) maps.take(wide, 30 * k);
      return maps.close().diagonal;
    });
    wasm.release(mark);
    got!.forEach((v, i) => {
      expect(v).toBeCloseTo(wanted![i]!, 9);
    });
  });

  it('say that a pixel is no number', () => {
    const shape = shapeOf(4, 4);
    const pixels = new Float32Array(16).fill(1);
    pixels[4] = Number.NaN;
    const mark = wasm.mark;
    expect(new CompiledFrameMaps(wasm, shape).take(pixels, 0).finite).toBe(true);
    pixels[5] = Number.NaN;
    expect(new CompiledFrameMaps(wasm, shape).take(pixels, 0).finite).toBe(false);
    expect(new CompiledFrameMaps(wasm, { ...shape, threshold: 1 }).take(pixels, 0).finite).toBe(false);
    wasm.release(mark);
  });

  it('are lent to one borrower at a time', () => {
    const shape = shapeOf(5, 5);
    let asked = 0;
    const { maps: first } = borrowFrameKernels(wasm, shape, 0, () => {
      asked += 1;
    });
    expect(borrowFrameKernels(wasm, { ...shape, masked: shape.masked.slice() }, 0, () => {}).maps).toBe(
      first,
    );
    expect(asked).toBe(1);
    expect(borrowFrameKernels(wasm, shapeOf(6, 5), 0, () => {}).maps).not.toBe(first);
  });
});
