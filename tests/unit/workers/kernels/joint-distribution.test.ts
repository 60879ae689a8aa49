import { describe, expect, it } from 'vitest';
import { createRandom } from '../../../../shared/util/random';
import type { FrameExports } from '../../../../workers/kernels/frame-wasm';
import { CompiledJoint, ReadableJoint } from '../../../../workers/kernels/joint-distribution';
import { instantiateWasm } from '../../../../workers/kernels/wasm-module';
import { compileKernels } from '../../../../workers/pipeline/kernels-node';

const compiled = await compileKernels('frames');
if (compiled === null) throw new Error('build the kernels first: npm run build:wasm');
const wasm = await instantiateWasm<FrameExports>(compiled);

describe('full joint distribution', () => {
  it('of three frames of two pixels is that of its formula', () => {
    const joint = new ReadableJoint(2);
    const stack = Float64Array.of(1, 2, 4, 0, 5, 5);
    for (let k = 0; k < 3; k++) joint.take(stack, 2 * k);
    // D = (-3, 2) and (-1, -5): halves of 9 + 1, -6 + 5, 4 + 25.
    expect([...joint.view()]).toEqual([5, -0.5, 0, 14.5]);
  });

  it.each([
    ['dense', 40, 200, 1],
    ['dense', 37, 130, 1],
    ['sparse', 64, 300, 0.05],
    ['sparse', 61, 140, 0.05],
    ['either', 64, 400, 0.14],
    ['empty', 16, 5, 0],
  ] as const)('compiled is that of the readable twin: %s, %i pixels, %i frames', (_, n, frames, lit) => {
    const random = createRandom(n);
    const stack = Uint16Array.from({ length: n * frames }, () =>
      random.uniform() < lit ? 1 + random.below(lit === 1 ? 4000 : 3) : 0,
    );
    const mark = wasm.mark;
    const got = new CompiledJoint(wasm, n);
    const wanted = new ReadableJoint(n);
    for (const joint of [got, wanted]) {
      for (let k = 0; k < frames; k++) {
        if (k === Math.floor(frames / 3)) joint.pause();
        joint.take(stack, k * n);
      }
    }
    const most = wanted.view().reduce((m, v) => Math.max(m, Math.abs(v)), 0);
    const found = got.view();
    wanted.view().forEach((v, i) => {
      expect(Math.abs(v - found[i]!)).toBeLessThanOrEqual(1e-6 * most);
    });
    wasm.release(mark);
  });
});
