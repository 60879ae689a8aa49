import { describe, expect, it } from 'vitest';
import type { FrameTally } from '../../shared/contracts/tally';
import { farFieldK } from '../../shared/physics/calibration';
import { fitFramePeaks } from '../../shared/physics/fit-frames';
import { buildFrameMaps, type SelfMaps } from '../../shared/physics/frame-maps';
import { createRandom } from '../../shared/util/random';
import { FrameAccumulator } from '../../workers/accumulators/frame-accumulator';
import { FrameSpectra } from '../../workers/kernels/frame-spectra';
import { fillDials } from '../../workers/studies/dials';
import { jointMapStudy } from '../../workers/studies/joint-map/study';
import { seedStatistics } from '../support/seed-statistics';
import { type FrameScene, simulateFrames } from './simulated-frames';
import { countedFrames, farPlane, nearPlane, PITCH_UM } from './study-inputs';

const selfMaps =
  (width: number, height: number): SelfMaps =>
  (image) => {
    const spectra = new FrameSpectra(width, height);
    const plus = new Float64Array((2 * width - 1) * (2 * height - 1));
    const minus = plus.slice();
    spectra.addSquares(image, null);
    spectra.moveTo(plus, minus, 1);
    return { plus, minus };
  };

function tallyOf(frames: number[][], width: number, height: number, masked: number[] = []): FrameTally {
  const mask = Uint8Array.from({ length: width * height }, (_, i) => (masked.includes(i) ? 1 : 0));
  const count = frames.length;
  const accumulator = new FrameAccumulator({
    kind: 'frames',
    width,
    height,
    frames: count,
    blocks: 1,
    masked: mask,
  });
  const pixels = Float64Array.from(frames.flat());
  accumulator.push({ kind: 'frames', firstFrame: 0, count, width, height, pixels, bytes: 0 });
  return accumulator.tally();
}

describe('Sum and difference maps of one camera', () => {
  it('counts overlapping pairs with a masked pixel: n(d) = 1,1,1,3,1,1,1 and n(s) = 1,0,2,2,1,2,1', () => {
    const rows = Array.from({ length: 4 }, (_, k) => [k % 2, 1, (k + 1) % 2, k % 3]);
    const maps = buildFrameMaps(tallyOf(rows, 4, 1, [1]), selfMaps(4, 1), 0);
    // The own pairs (three at d = 0; one on each even sum of an open pixel) are taken out.
    expect([...maps.minus.pairs]).toEqual([1, 1, 1, 3 - 3, 1, 1, 1]);
    expect([...maps.plus.pairs]).toEqual([1 - 1, 0, 2, 2, 1 - 1, 2, 1 - 1]);
  });

  it('takes the own pairs out of the sum map', () => {
    const rows = [
      [1, 0, 2],
      [0, 1, 1],
      [2, 1, 0],
      [1, 2, 1],
    ];
    const maps = buildFrameMaps(tallyOf(rows, 3, 1), selfMaps(3, 1), 0);
    // Consecutive estimator of this stack, symmetrised, from its published-form matrix:
    // [[1,-1,-1/3],[-1/3,-1/3,0],[0,-2/3,1]] averaged with its transpose, i = j removed, summed at s = i + j.
    const g01 = (-1 - 1 / 3) / 2;
    const g02 = (-1 / 3 + 0) / 2;
    const g12 = (0 - 2 / 3) / 2;
    const expected = [0, 2 * g01, 2 * g02, 2 * g12, 0];
    maps.plus.value.forEach((v, s) => {
      expect(v).toBeCloseTo(expected[s]!, 12);
    });
    expect(maps.minus.value[2]).toBe(0);
  });

  it('knows the noise of a sum and of a difference bin: sqrt(2n) and sqrt(n), times sqrt 1.5 of the estimator', () => {
    const random = createRandom(11);
    const size = 8;
    const frames = 400;
    const p = 0.2;
    const trials = 60;
    const at = { plus: 7 * 15 + 6, minus: 8 * 15 + 9 };
    const found = { plus: 0, minus: 0 };
    const said = { plus: 0, minus: 0 };
    for (let t = 0; t < trials; t += 1) {
      const stack = Array.from({ length: frames }, () =>
        Array.from({ length: size * size }, () => (random.uniform() < p ? 1 : 0)),
      );
      const maps = buildFrameMaps(tallyOf(stack, size, size), selfMaps(size, size), 0);
      for (const kind of ['plus', 'minus'] as const) {
        found[kind] += maps[kind].value[at[kind]]! ** 2 / trials;
        said[kind] += maps[kind].variance[at[kind]]! / trials;
      }
    }
    // 60 trials tell a variance to 18 %.
    expect(found.plus / said.plus).toBeGreaterThan(0.5);
    expect(found.plus / said.plus).toBeLessThan(1.6);
    expect(found.minus / said.minus).toBeGreaterThan(0.5);
    expect(found.minus / said.minus).toBeLessThan(1.6);
  });

  it('finds no peak in uncorrelated light', () => {
    const scene: FrameScene = {
      size: 16,
      frames: 300,
      blocks: 20,
      truth: { v1: 10, v2: 10, c: 9 },
      centre: 7.5,
      pairsPerFrame: 0,
      efficiency: 0.5,
      darksPerFrame: 20,
    };
    const tally = simulateFrames(scene, createRandom(3));
    const data = countedFrames(tally, nearPlane);
    const dials = fillDials(jointMapStudy.info, { resamples: 100 });
    const output = jointMapStudy.finish({ inputs: { data }, dials, seed: 1, partial: false });
    expect(output.quantities).toEqual({});
    expect(output.checks.find(({ id }) => id === 'peak-found')?.status).toBe('fail');
  });
});

const SEEDS = 60;
const size = 24;
const narrow = 1.5 ** 2;
const wide = 8 ** 2;
const scene: FrameScene = {
  size,
  // Peaks of about 18 standard errors; below 15 the study itself cautions that widths come out some percent too large.
  frames: 900,
  blocks: 50,
  truth: { v1: (narrow + wide) / 4, v2: (narrow + wide) / 4, c: (wide - narrow) / 4 },
  centre: 11.3,
  pairsPerFrame: 15,
  efficiency: 0.9,
  darksPerFrame: 2,
  maskedPixels: [100, 301],
};

describe('Widths from simulated camera frames', () => {
  const truth = Math.sqrt(narrow + 1 / 6);
  const cases = [
    { id: 'width.x.minus.fit', plane: nearPlane, flip: 1, pixel: PITCH_UM / 2 },
    { id: 'width.x.plus.fit', plane: farPlane, flip: -1, pixel: farFieldK(PITCH_UM, 810, 100) },
  ] as const;
  it.each(cases)(
    '$id is unbiased and its errors cover',
    ({ id, plane, flip, pixel }) => {
      const flipped = { ...scene, truth: { ...scene.truth, c: flip * scene.truth.c } };
      const found = Array.from({ length: SEEDS }, (_, k) => {
        const data = countedFrames(simulateFrames(flipped, createRandom(700 + k)), plane);
        const dials = fillDials(jointMapStudy.info, { resamples: 200 });
        const output = jointMapStudy.finish({ inputs: { data }, dials, seed: k, partial: false });
        const { value, sigma } = output.quantities[id]!;
        return { value, sigma, truth: pixel * truth };
      });
      const { bias, coverage } = seedStatistics(found);
      expect(Math.abs(bias)).toBeLessThan(2);
      expect(coverage).toBeGreaterThanOrEqual(0.55);
      expect(coverage).toBeLessThanOrEqual(0.8);
    },
    180_000,
  );

  it('refuses a width when most of the peak is under the bins left out', () => {
    const tally = simulateFrames({ ...scene, frames: 300 }, createRandom(5));
    const maps = buildFrameMaps(tally, selfMaps(size, size), 4);
    const peak = fitFramePeaks(maps, 'minus').minus;
    const data = countedFrames(tally, nearPlane);
    const dials = fillDials(jointMapStudy.info, { crosstalk: 4, resamples: 100 });
    const output = jointMapStudy.finish({ inputs: { data }, dials, seed: 1, partial: false });
    expect(peak === null || peak.hidden > 0.7).toBe(true);
    expect(output.quantities['width.x.minus.fit']).toBeUndefined();
    expect(output.checks.some(({ status }) => status === 'fail')).toBe(true);
  });

  it('B20: the noise of a difference bin of 35 pairs is that of sqrt(35) pairs, each once', () => {
    // Derived by numerics, Monte Carlo ratio 0.991: in units of p (1 - p)/sqrt(F) for plain covariances. Consecutive
    // frames have 1.5 times their variance.
    const [width, height, frames, p] = [8, 5, 100_000, 0.2];
    const pixels = width * height;
    const cells = (2 * width - 1) * (2 * height - 1);
    const clicks = new Float64Array(pixels).fill(p * frames);
    const maps = buildFrameMaps(
      {
        width,
        height,
        frames,
        masked: new Uint8Array(pixels),
        sum: clicks,
        sumSquares: clicks,
        diagonal: new Float64Array(pixels),
        plus: new Float64Array(cells),
        minus: new Float64Array(cells),
        blockTotals: new Float64Array(1),
        blockWindow: { x: 0, y: 0, nx: 2 * width - 1, ny: 2 * height - 1 },
        blockPlus: [null],
        blockMinus: [null],
      },
      selfMaps(width, height),
      0,
    );
    // Neighbours along x: 7 x 5 pairs.
    const bin = (height - 1) * (2 * width - 1) + width;
    expect(maps.minus.pairs[bin]).toBe(35);
    const noise = Math.sqrt(maps.minus.variance[bin]! / 1.5) / ((p * (1 - p)) / Math.sqrt(frames));
    expect(Math.abs(noise - 5.916079783099616)).toBeLessThan(0.35496478698597694);
    // The bin on the other side is the same data, and as noisy.
    expect(maps.minus.variance[bin - 2]).toBeCloseTo(maps.minus.variance[bin]!, 12);
  });
});
