import { describe, expect, it } from 'vitest';
import { createRandom } from '../../../../shared/util/random';
import type { FrameExports } from '../../../../workers/kernels/frame-wasm';
import { eachResample, resampleMaps } from '../../../../workers/kernels/resample-maps';
import { instantiateWasm } from '../../../../workers/kernels/wasm-module';
import { compileKernels } from '../../../../workers/pipeline/kernels-node';

/** The definition, one sum a cell. */
function slow(
  maps: Float64Array,
  blocks: number,
  cells: number,
  weights: Float64Array,
  r: number,
): Float64Array {
  return Float64Array.from({ length: cells }, (_, cell) => {
    let sum = 0;
    for (let b = 0; b < blocks; b++) sum += weights[r * blocks + b]! * maps[b * cells + cell]!;
    return sum;
  });
}

async function frameKernels() {
  const compiled = await compileKernels('frames');
  if (compiled === null) throw new Error('Build the kernels first: npm run build:wasm.');
  return instantiateWasm<FrameExports>(compiled);
}

describe('weighted sums of block maps', () => {
  it('are the definition, compiled and not, for any shape', async () => {
    const wasm = await frameKernels();
    const random = createRandom(5);
    for (const [blocks, cells, resamples] of [
      [1, 1, 1],
      [3, 63, 5],
      [50, 64, 32],
      [7, 197, 70],
      [0, 5, 3],
      [4, 6, 0],
    ] as const) {
      const maps = Float64Array.from({ length: blocks * cells }, () => 1e3 * random.normal());
      const weights = Float64Array.from({ length: resamples * blocks }, () => random.below(4));
      const out = new Float64Array(resamples * cells);
      resampleMaps(maps, blocks, cells, weights, resamples, out);
      const mark = wasm.mark;
      for (const kernels of [wasm, null]) {
        const seen: number[] = [];
        eachResample(kernels, maps, blocks, cells, weights, resamples, (map, index) => {
          seen.push(index);
          expect(map).toEqual(out.subarray(index * cells, (index + 1) * cells));
          expect(map).toEqual(slow(maps, blocks, cells, weights, index));
        });
        expect(seen).toEqual(Array.from({ length: resamples }, (_, i) => i));
      }
      expect(wasm.mark).toBe(mark);
    }
  });

  it('give their room back when the taker fails', async () => {
    const wasm = await frameKernels();
    const mark = wasm.mark;
    const fail = () => {
      throw new RangeError('no');
    };
    expect(() => eachResample(wasm, new Float64Array(8), 2, 4, Float64Array.of(1, 1), 1, fail)).toThrow('no');
    expect(wasm.mark).toBe(mark);
  });

  it('carry a pixel that holds no number to its own cell only', async () => {
    const maps = Float32Array.of(1, Number.NaN, 2, 3, 4, 5);
    eachResample(await frameKernels(), maps, 2, 3, Float64Array.of(1, 2), 1, (map) =>
      expect([...map]).toEqual([7, Number.NaN, 12]),
    );
  });
});
