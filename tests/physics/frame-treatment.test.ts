import { describe, expect, it } from 'vitest';
import type { DialValues } from '../../shared/contracts/dial';
import type { FrameSpec } from '../../shared/contracts/tally';
import { createRandom } from '../../shared/util/random';
import { FrameAccumulator } from '../../workers/accumulators/frame-accumulator';
import { fillDials } from '../../workers/studies/dials';
import { frameChoices } from '../../workers/studies/joint-map/frame-dials';
import { jointMapStudy } from '../../workers/studies/joint-map/study';
import { type FrameScene, simulateFrames } from './simulated-frames';
import { countedFrames, nearPlane, PITCH_UM } from './study-inputs';

const size = 24;
const narrow = 1.5 ** 2;
const wide = 8 ** 2;
const id = 'width.x.minus.fit';
/** The blur of two pixels is left in. */
const truth = (PITCH_UM / 2) * Math.sqrt(narrow + 1 / 6);

const weak: FrameScene = {
  size,
  frames: 900,
  blocks: 50,
  truth: { v1: (narrow + wide) / 4, v2: (narrow + wide) / 4, c: (wide - narrow) / 4 },
  centre: 11.3,
  pairsPerFrame: 15,
  efficiency: 0.9,
  darksPerFrame: 2,
};

function study(scene: FrameScene, seed: number, given: DialValues) {
  const dials = fillDials(jointMapStudy.info, { resamples: 200, ...given });
  const tally = simulateFrames({ ...scene, treatment: frameChoices(dials).treatment }, createRandom(seed));
  const data = countedFrames(tally, nearPlane);
  return { tally, output: jointMapStudy.finish({ inputs: { data }, dials, seed: 1, partial: false }) };
}

/** Infinitely uncertain where the study gives none. */
function widthOf({ output }: ReturnType<typeof study>): { value: number; sigma: number } {
  const { value, sigma } = output.quantities[id] ?? {};
  return { value: value ?? Number.NaN, sigma: sigma ?? Number.POSITIVE_INFINITY };
}

describe('What is done to the pixels of frames', () => {
  it('a threshold takes out read noise that a linear reading keeps', () => {
    // 50 counts an electron above an offset of 100, as much noise as a third of an electron.
    const noisy = { ...weak, readout: { offset: 100, gain: 50, flicker: 0, readNoise: 17 } };
    const counted = widthOf(study(noisy, 31, { offset: 100, threshold: 35 }));
    const linear = widthOf(study(noisy, 31, { offset: 100 }));
    expect(Math.abs(counted.value - truth)).toBeLessThan(3 * counted.sigma);
    expect(linear.sigma).toBeGreaterThan(1.2 * counted.sigma);
  });

  it('the offset changes nothing but the mean frame where pixels count what they hold', () => {
    const raised = { ...weak, frames: 300, readout: { offset: 100, gain: 50, flicker: 0, readNoise: 0 } };
    const kept = study(raised, 7, {}).tally;
    const taken = study(raised, 7, { offset: 100 }).tally;
    // Whole maps differ by the end frames, and so by one frame in 300.
    expect(taken.blockMinus).toEqual(kept.blockMinus);
    expect(taken.blockPlus).toEqual(kept.blockPlus);
    expect(kept.sum[0]! - taken.sum[0]!).toBeCloseTo(100 * 300, 6);
  });

  it('scaling to the mean total takes out a flickering gain, and its width is that of the pairs', () => {
    const bright: FrameScene = {
      ...weak,
      pairsPerFrame: 150,
      darksPerFrame: 5,
      frames: 1500,
      readout: { offset: 100, gain: 50, flicker: 0.15, readNoise: 5 },
    };
    const scaled = study(bright, 11, { offset: 100, normalise: 'on' });
    const plain = study(bright, 11, { offset: 100 });
    // All covariances together: the flicker's (0.15 times the mean total)^2 against what the total may still vary.
    const all = (map: Float64Array) => map.reduce((sum, v) => sum + v, 0);
    expect(Math.abs(all(scaled.tally.minus))).toBeLessThan(1e-3 * all(plain.tally.minus));
    // With a flat pedestal the mean is -2: the negative one of scaled frames takes the flanks off the peak.
    const seeds = Array.from({ length: 8 }, (_, k) => 100 + k);
    const pulls = seeds.map((seed) => {
      const { value, sigma } = widthOf(study(bright, seed, { offset: 100, normalise: 'on' }));
      return (value - truth) / sigma;
    });
    expect(Math.abs(pulls.reduce((sum, v) => sum + v, 0) / 8)).toBeLessThan(3 / Math.sqrt(8));
    const width = widthOf(scaled);
    expect(Math.abs(width.value - truth)).toBeLessThan(3 * width.sigma);
    expect(width.sigma).toBeLessThan(0.1 * truth);
    // Its fit would give 2.2 times the width, 25 of its standard errors off.
    expect(plain.output.quantities).toEqual({});
    expect(plain.output.checks.find((check) => check.id === 'light-steady')?.status).toBe('fail');
    expect(scaled.output.checks.find((check) => check.id === 'light-steady')?.status).toBe('pass');
    // The counts are those of the mean frame.
    expect(all(scaled.tally.sum) / all(plain.tally.sum)).toBeCloseTo(1, 6);
    expect(scaled.output.statement).toMatch(/every frame was scaled to the mean total/);
  });

  it('a threshold lowers the covariance of pairs by e^-m of each pixel, scaling by the shares of light', () => {
    // Two pixels of Poisson singles and Poisson pairs between them; laws as the dials state them.
    const [single, pair, frames] = [0.25, 0.05, 60_000];
    const random = createRandom(12);
    const pixels = Float64Array.from({ length: 2 * frames });
    for (let l = 0; l < frames; l += 1) {
      const both = random.poisson(pair);
      pixels[2 * l] = both + random.poisson(single);
      pixels[2 * l + 1] = both + random.poisson(2 * single);
    }
    const covariance = (treatment: Pick<FrameSpec, 'threshold' | 'normalised'>, light = 0) => {
      const accumulator = new FrameAccumulator({
        kind: 'frames',
        width: 2,
        height: 1,
        frames,
        blocks: 4,
        masked: new Uint8Array(2),
        jointRegion: { x0: 0, y0: 0, x1: 1, y1: 0 },
        ...treatment,
      });
      const lit = pixels.map((v) => v + light);
      accumulator.push({
        kind: 'frames',
        firstFrame: 0,
        count: frames,
        width: 2,
        height: 1,
        pixels: lit,
        bytes: 0,
      });
      return accumulator.tally().joint![1]! / (frames - 1);
    };
    const means = [single + pair, 2 * single + pair] as const;
    const [p, q] = means.map((m) => 1 - Math.exp(-m)) as [number, number];
    const clicks = (1 - p) * (1 - q) * Math.expm1(pair);
    const clickError = Math.sqrt((1.5 * p * (1 - p) * q * (1 - q)) / frames);
    expect(Math.abs(covariance({ threshold: 0 }) - clicks)).toBeLessThan(4 * clickError);
    expect(Math.abs(covariance({}) - pair)).toBeLessThan(4 * Math.sqrt((1.5 * means[0] * means[1]) / frames));
    // To first order in the spread of the total, so on a level of 50 counts.
    const totals = [means[0] + pair, means[1] + pair] as const;
    const [f, g] = means.map((m) => (m + 50) / (means[0] + means[1] + 100)) as [number, number];
    const law = pair - f * totals[1] - g * totals[0] + f * g * (totals[0] + totals[1]);
    expect(covariance({ normalised: true }, 50)).toBeCloseTo(law, 2);
  });

  it('maps as sums are maps as means times the pairs of the bin, and quantities stay', () => {
    const tally = simulateFrames({ ...weak, frames: 200 }, createRandom(2));
    const data = countedFrames(tally, nearPlane);
    const [mean, sum] = ['mean', 'sum'].map((overlap) => {
      const dials = fillDials(jointMapStudy.info, { resamples: 100, overlap });
      return jointMapStudy.finish({ inputs: { data }, dials, seed: 1, partial: false });
    });
    expect(sum!.quantities).toEqual(mean!.quantities);
    // One row up and one column to the right: 23 x 23 pairs.
    const at = size * (2 * size - 1) + size;
    expect(sum!.maps.minus!.data[at]).toBeCloseTo(23 * 23 * (mean!.maps.minus!.data[at] as number), 9);
  });

  it('gives no width where the peak reaches past what is kept block by block', () => {
    const dials = fillDials(jointMapStudy.info, { resamples: 100 });
    const accepted = [47, 9].map((blockSide) => {
      const tally = simulateFrames({ ...weak, treatment: { blockSide } }, createRandom(31));
      const data = countedFrames(tally, nearPlane);
      const output = jointMapStudy.finish({ inputs: { data }, dials, seed: 1, partial: false });
      return {
        width: output.quantities[id],
        check: output.checks.find((check) => check.id === 'peak-in-window')?.status,
      };
    });
    expect(accepted[0]!.width).toBeDefined();
    expect(accepted[0]!.check).toBeUndefined();
    expect(accepted[1]).toEqual({ width: undefined, check: 'fail' });
  });
});
