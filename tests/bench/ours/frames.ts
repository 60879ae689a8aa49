import { FrameSpectra } from '../../../workers/kernels/frame-spectra';
import { loadU16, type OpenKernel } from './adapter';

export const frames: OpenKernel = async (folder, [side]) => {
  const width = Number(side);
  const pixels = width * width;
  const stack = await loadU16(folder, 'frames.u16');
  const cells = (2 * width - 1) ** 2;
  let plus = new Float64Array(cells);
  let minus = new Float64Array(cells);
  const image = (k: number) => Float64Array.from(stack.subarray(k * pixels, (k + 1) * pixels));
  const spectra = new FrameSpectra(width, width);
  return {
    work(items) {
      plus = new Float64Array(cells);
      minus = new Float64Array(cells);
      let before = image(0);
      for (let k = 1; k < items; k++) {
        const now = image(k);
        for (let i = 0; i < pixels; i++) before[i]! -= now[i]!;
        spectra.addSquares(before, null);
        before = now;
      }
      spectra.moveTo(plus, minus, 0.5);
      spectra.addSquares(image(0), null);
      spectra.moveTo(plus, minus, 0.5);
      spectra.addSquares(image(items - 1), null);
      spectra.moveTo(plus, minus, -0.5);
    },
    answer() {
      const both = new Float64Array(2 * cells);
      both.set(plus);
      both.set(minus, cells);
      return both;
    },
  };
};
