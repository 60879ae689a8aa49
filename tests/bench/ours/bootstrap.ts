import { type Gaussian2d, Gaussian2dFitter } from '../../../shared/physics/fit-gaussian-2d';
import { eachResample } from '../../../workers/kernels/resample-maps';
import { loadBytes, type OpenKernel } from './adapter';
import { kernelsOf } from './kernels';

/** Resampled maps and the fit of each, started from the fit of the whole. */
export const bootstrap: OpenKernel = async (folder, [blockCount, side]) => {
  const blocks = Number(blockCount);
  const width = Number(side);
  const cells = width * width;
  const wasm = await kernelsOf('frames');
  const { buffer, byteOffset } = await loadBytes(folder, 'maps.f64');
  const maps = new Float64Array(buffer, byteOffset, blocks * cells);
  const weights = Float64Array.from(await loadBytes(folder, 'weights.u8'));
  let widths = new Float64Array(0);
  return {
    work(items) {
      const fitter = new Gaussian2dFitter(width, width);
      const whole = new Float64Array(cells);
      for (let b = 0; b < blocks; b++) {
        for (let i = 0; i < cells; i++) whole[i]! += maps[b * cells + i]!;
      }
      const start = peakOf(fitter, whole, roughPeak(whole, width));
      widths = new Float64Array(2 * items);
      const drawn = weights.subarray(0, items * blocks);
      eachResample(wasm, maps, blocks, cells, drawn, items, (map, index) => {
        const peak = peakOf(fitter, map, start);
        widths[2 * index] = peak.sigmaX;
        widths[2 * index + 1] = peak.sigmaY;
      });
    },
    answer: () => widths,
  };
};

function peakOf(fitter: Gaussian2dFitter, map: Float64Array, start: Gaussian2d): Gaussian2d {
  const fit = fitter.fit(map, start);
  if (fit.end !== 'converged') throw new Error(`A fit ended with ${fit.end}.`);
  return fit.peak;
}

function roughPeak(map: Float64Array, width: number): Gaussian2d {
  const sorted = map.slice().sort();
  const offset = sorted[sorted.length >> 1]!;
  return {
    amplitude: sorted.at(-1)! - offset,
    x: width / 2,
    y: width / 2,
    sigmaX: width / 10,
    sigmaY: width / 10,
    offset,
    rho: 0,
  };
}
