import type { FrameSpec, FrameTally } from '../../shared/contracts/tally';
import type { PairCovariance } from '../../shared/physics/double-gaussian';
import type { Random } from '../../shared/util/random';
import { FrameAccumulator } from '../../workers/accumulators/frame-accumulator';

/** Thresholdless camera with both photons of every pair on one sensor: Poisson pairs, efficiency, flat dark counts. */
export interface FrameScene {
  size: number;
  frames: number;
  blocks: number;
  /** Pixel units, the same law along x and y. */
  truth: PairCovariance;
  centre: number;
  pairsPerFrame: number;
  efficiency: number;
  darksPerFrame: number;
  maskedPixels?: readonly number[];
  /** Read-out: offset + gain * electrons + read noise; left out, pixels hold electrons. */
  readout?: {
    offset: number;
    gain: number;
    /** Frame-to-frame standard deviation of the gain, relative. */
    flicker: number;
    readNoise: number;
  };
  treatment?: Pick<FrameSpec, 'offset' | 'threshold' | 'normalised' | 'blockSide'>;
}

/** @param keep is given every frame, in order. */
export function simulateFrames(
  scene: FrameScene,
  random: Random,
  keep?: (image: Float64Array) => void,
): FrameTally {
  const { size, frames, blocks, truth } = scene;
  const masked = new Uint8Array(size * size);
  for (const pixel of scene.maskedPixels ?? []) masked[pixel] = 1;
  const accumulator = new FrameAccumulator({
    kind: 'frames',
    width: size,
    height: size,
    frames,
    blocks,
    masked,
    ...scene.treatment,
  });
  const slope = truth.c / truth.v1;
  const rest = Math.sqrt(truth.v2 - truth.c * slope);
  const sigma = Math.sqrt(truth.v1);
  const chunk = 64;
  for (let first = 0; first < frames; first += chunk) {
    const count = Math.min(chunk, frames - first);
    const pixels = new Float64Array(count * size * size);
    for (let f = 0; f < count; f += 1) {
      const hit = (x: number, y: number): void => {
        const ix = Math.round(x);
        const iy = Math.round(y);
        if (ix < 0 || iy < 0 || ix >= size || iy >= size) return;
        const at = (f * size + iy) * size + ix;
        pixels[at] = pixels[at]! + 1;
      };
      for (let k = random.poisson(scene.pairsPerFrame); k > 0; k -= 1) {
        const x1 = sigma * random.normal();
        const y1 = sigma * random.normal();
        const x2 = slope * x1 + rest * random.normal();
        const y2 = slope * y1 + rest * random.normal();
        if (random.uniform() < scene.efficiency) hit(scene.centre + x1, scene.centre + y1);
        if (random.uniform() < scene.efficiency) hit(scene.centre + x2, scene.centre + y2);
      }
      for (let k = random.poisson(scene.darksPerFrame); k > 0; k -= 1)
        hit(random.below(size), random.below(size));
      if (scene.readout === undefined) continue;
      const { offset, gain, flicker, readNoise } = scene.readout;
      const scale = gain * (1 + flicker * random.normal());
      for (let i = f * size * size; i < (f + 1) * size * size; i += 1)
        pixels[i] = offset + scale * pixels[i]! + readNoise * random.normal();
    }
    for (let f = 0; keep !== undefined && f < count; f += 1) {
      keep(pixels.slice(f * size * size, (f + 1) * size * size));
    }
    accumulator.push({
      kind: 'frames',
      firstFrame: first,
      count,
      width: size,
      height: size,
      pixels,
      bytes: 0,
    });
  }
  return accumulator.tally();
}
