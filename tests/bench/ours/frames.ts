import { CompiledFrameMaps } from '../../../workers/kernels/frame-maps-wasm';
import { loadU16, type OpenKernel } from './adapter';
import { kernelsOf } from './kernels';

/** Sums of differences and the correction of the end frames, as the accumulator of frames puts them together. */
export const frames: OpenKernel = async (folder, [side]) => {
  const width = Number(side);
  const pixels = width * width;
  const stack = await loadU16(folder, 'frames.u16');
  const shape = {
    width,
    height: width,
    masked: new Uint8Array(pixels),
    offset: 0,
    threshold: null,
    normalised: false,
  };
  const maps = new CompiledFrameMaps(await kernelsOf('frames'), shape);
  const sums = {
    sum: new Float64Array(pixels),
    sumSquares: new Float64Array(pixels),
    jointX: new Float64Array(pixels),
    jointY: new Float64Array(pixels),
  };
  const cells = (2 * width - 1) ** 2;
  const both = new Float64Array(2 * cells);
  const plus = both.subarray(0, cells);
  const minus = both.subarray(cells);
  return {
    work(items) {
      maps.pause();
      for (let k = 0; k < items; k++) maps.take(stack, k * pixels);
      maps.drain(sums);
      const less = new Float64Array(pixels);
      const more = new Float64Array(pixels);
      const last = (items - 1) * pixels;
      for (let i = 0; i < pixels; i++) {
        less[i] = stack[i]! - stack[last + i]!;
        more[i] = stack[i]! + stack[last + i]!;
      }
      maps.addProduct(less, more);
      const closed = maps.close();
      plus.set(closed.plus);
      minus.set(closed.minus);
    },
    answer: () => both,
  };
};
