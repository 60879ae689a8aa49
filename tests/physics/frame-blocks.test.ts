import { describe, expect, it } from 'vitest';
import type { FrameTally } from '../../shared/contracts/tally';
import { fitShape } from '../../shared/physics/fit-shape';
import { blockSpread, commonLight } from '../../shared/physics/frame-blocks';
import { buildFrameMaps } from '../../shared/physics/frame-maps';
import { centreNode } from '../../shared/physics/gaussian-cells';
import { createRandom } from '../../shared/util/random';
import { FrameAccumulator } from '../../workers/accumulators/frame-accumulator';
import { FrameSpectra } from '../../workers/kernels/frame-spectra';
import { fillDials } from '../../workers/studies/dials';
import { jointMapStudy } from '../../workers/studies/joint-map/study';
import { simulateFrames } from './simulated-frames';
import { countedFrames, nearPlane } from './study-inputs';

const size = 16;
const pixels = size * size;

/** Frame l holds what `image` gives for it. */
function tallyOf(frames: number, blocks: number, image: (l: number) => Float64Array): FrameTally {
  const accumulator = new FrameAccumulator({
    kind: 'frames',
    width: size,
    height: size,
    frames,
    blocks,
    masked: new Uint8Array(pixels),
  });
  for (let l = 0; l < frames; l += 1) {
    accumulator.push({
      kind: 'frames',
      firstFrame: l,
      count: 1,
      width: size,
      height: size,
      pixels: image(l),
      bytes: 0,
    });
  }
  return accumulator.tally();
}

function spreadOf(tally: FrameTally) {
  const spectra = new FrameSpectra(tally.width, tally.height);
  const cells = (2 * tally.width - 1) * (2 * tally.height - 1);
  const maps = buildFrameMaps(
    tally,
    (image) => {
      const plus = new Float64Array(cells);
      const minus = new Float64Array(cells);
      spectra.addSquares(image, null);
      spectra.moveTo(plus, minus, 1);
      return { plus, minus };
    },
    1,
  );
  const spread = blockSpread(tally, tally.blockDifferences, maps.plus);
  if (spread === null) throw new Error('nothing was judged');
  return spread;
}

/** Poisson light of mean 1 that comes again after `period` frames. */
function repeating(period: number, seed: number): (l: number) => Float64Array {
  const random = createRandom(seed);
  const stack = Array.from({ length: period }, () =>
    Float64Array.from({ length: pixels }, () => random.poisson(1)),
  );
  return (l) => stack[l % period]!;
}

describe('How far apart the blocks of a stack lie', () => {
  // Expected 1 by the noise law of the estimator; the least of several distances lies a little below.
  it.each([
    { frames: 600, blocks: 30 },
    { frames: 64, blocks: 32 },
    { frames: 60, blocks: 60 },
  ])('as counting noise has it for $frames frames in $blocks blocks', ({ frames, blocks }) => {
    const { ratio, sigma } = spreadOf(tallyOf(frames, blocks, repeating(frames, 4)));
    expect(ratio).toBeGreaterThan(0.88);
    expect(ratio - 4 * sigma).toBeLessThan(1);
  });

  it('no less where the light drifts, whose spread is no noise', () => {
    const random = createRandom(8);
    const drifting = (l: number) =>
      Float64Array.from({ length: pixels }, (_, i) => random.poisson(50 + l / 4 + (i % size)));
    expect(spreadOf(tallyOf(600, 30, drifting)).ratio).toBeGreaterThan(0.88);
  });

  // Frames per block: 20. Whole periods in a block, several blocks a period, and neither.
  it.each([
    { period: 10, most: 0.01 },
    { period: 100, most: 0.01 },
    { period: 300, most: 0.01 },
    { period: 14, most: 0.2 },
    { period: 210, most: 0.51 },
  ])('far less where frames come again after $period', ({ period, most }) => {
    expect(spreadOf(tallyOf(600, 30, repeating(period, 5))).ratio).toBeLessThan(most);
  });
});

describe('What the pixels of a frame have in common', () => {
  const scene = {
    size,
    frames: 1200,
    blocks: 20,
    truth: { v1: 3, v2: 3, c: 2.5 },
    centre: 7.5,
    pairsPerFrame: 30,
    efficiency: 0.9,
    darksPerFrame: 0,
  };
  // N pairs of efficiency h add 2 N h^2 to the 2 N h of their photons. Flat light of m photons a frame and m/n a pixel under
  // a gain that flickers by s: [m (1 + s^2) + s^2 m^2] / [m (1 + s^2) + s^2 m^2 / n], with m = 60, s = 0.3, n = 256.
  it.each([
    { name: 'photons alone', changed: { pairsPerFrame: 0, darksPerFrame: 30 }, wanted: 1 },
    { name: 'pairs', changed: {}, wanted: 1.9 },
    {
      name: 'photons under a flickering gain',
      changed: {
        pairsPerFrame: 0,
        darksPerFrame: 60,
        readout: { offset: 200, gain: 1, flicker: 0.3, readNoise: 0 },
      },
      wanted: (60 * 1.09 + 0.09 * 60 ** 2) / (60 * 1.09 + (0.09 * 60 ** 2) / 256),
    },
  ])('$name', ({ changed, wanted }) => {
    const { ratio, sigma } = commonLight(simulateFrames({ ...scene, ...changed }, createRandom(6)))!;
    expect(Math.abs(ratio - wanted)).toBeLessThan(4 * sigma);
  });
});

describe('Widths of a stack of few frames, copied', () => {
  const scene = {
    size,
    frames: 200,
    blocks: 20,
    truth: { v1: 6, v2: 6, c: 5 },
    centre: 7.4,
    pairsPerFrame: 40,
    efficiency: 0.9,
    darksPerFrame: 2,
  };
  const dials = fillDials(jointMapStudy.info, { resamples: 100 });
  const finished = (tally: FrameTally) =>
    jointMapStudy.finish({
      inputs: { data: countedFrames(tally, nearPlane) },
      dials,
      seed: 1,
      partial: false,
    });

  it('are given for the frames once, and not for the copies', () => {
    const stack: Float64Array[] = [];
    const once = simulateFrames(scene, createRandom(3), (image) => stack.push(image));
    const copied = tallyOf(3200, 20, (l) => stack[l % stack.length]!);
    expect(finished(once).quantities['width.x.minus.fit']).toBeDefined();
    const output = finished(copied);
    expect(output.quantities).toEqual({});
    expect(output.checks.find(({ id }) => id === 'blocks-apart')).toMatchObject({ status: 'fail' });
    expect(output.checks.find(({ id }) => id === 'peak-found')).toMatchObject({ figure: null });
  });
});

describe('A fit that its data do not determine', () => {
  it('has not settled', () => {
    // One row of cells: amplitude and the variance along y only appear as their ratio.
    const nx = 15;
    const flat = Float64Array.from({ length: nx }, (_, x) => Math.exp(-((x - 7) ** 2) / 8));
    const fit = fitShape({
      grid: { x0: 0, y0: 0, nx, ny: 1 },
      nodes: centreNode,
      data: flat,
      use: new Uint8Array(nx).fill(1),
      envelope: null,
      background: new Float64Array(nx).fill(1),
      freeAmplitude: true,
      backgroundAmplitude: 0,
      freeBackground: true,
      freeCentre: false,
      variance: new Float64Array(nx).fill(1e-4),
      start: { amplitude: 10, shape: { mx: 7, my: 0, xx: 3, xy: 0, yy: 3 } },
      leastVariance: 0.02,
    });
    expect(fit.settled).toBe(false);
  });
});
