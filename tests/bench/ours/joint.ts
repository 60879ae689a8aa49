import { CompiledJoint } from '../../../workers/kernels/joint-distribution';
import { loadU16, type OpenKernel } from './adapter';
import { kernelsOf } from './kernels';

/** Every seventh row and thirteenth column are compared. */
const ROWS = 7;
const COLUMNS = 13;

export const joint: OpenKernel = async (folder, [side]) => {
  const pixels = Number(side) ** 2;
  const stack = await loadU16(folder, 'frames.u16');
  const wasm = await kernelsOf('frames');
  const { mark } = wasm;
  let found: Float32Array = new Float32Array(0);
  return {
    work(items) {
      wasm.release(mark);
      const sums = new CompiledJoint(wasm, pixels);
      for (let k = 0; k < items; k++) sums.take(stack, k * pixels);
      found = sums.view();
    },
    answer() {
      const some: number[] = [];
      for (let i = 0; i < pixels; i += ROWS) {
        for (let j = 0; j < pixels; j += COLUMNS) some.push(j >= i ? found[i * pixels + j]! : 0);
      }
      return Float64Array.from(some);
    },
  };
};
