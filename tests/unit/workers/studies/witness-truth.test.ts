import { describe, expect, it } from 'vitest';
import type { StudyOutput } from '../../../../shared/contracts/output';
import { farFieldK } from '../../../../shared/physics/calibration';
import { columnSums, weightedVariance } from '../../../../shared/physics/conditional';
import { pairVariances, pixelBlurred } from '../../../../shared/physics/double-gaussian';
import { addMomentSums, covarianceOfSums, MOMENT_SUMS } from '../../../../shared/physics/moments';
import { createRandom } from '../../../../shared/util/random';
import { fillDials } from '../../../../workers/studies/dials';
import { jointMapStudy } from '../../../../workers/studies/joint-map/study';
import type { FinishRequest } from '../../../../workers/studies/study';
import { witnessStudy } from '../../../../workers/studies/witness/study';
import { meanJoint, simulateTally, type TallyScene } from '../../../physics/simulated-tally';
import { countedTags, farPlane, nearPlane, PITCH_UM } from '../../../physics/study-inputs';
import { seedStatistics } from '../../../support/seed-statistics';

const SEEDS = 150;
/** A double Gaussian on 16 x 16 pixels: narrow width 1.3, wide width 7 pixels. */
const narrow = 1.3 ** 2;
const wide = 7 ** 2;
const scene: TallyScene = {
  size: 16,
  slices: 80,
  truth: { v1: (narrow + wide) / 4, v2: (narrow + wide) / 4, c: (wide - narrow) / 4 },
  centre: 7.4,
  pairs: 1200,
  accidentals: 250,
  windows: 10,
};
const farScene: TallyScene = { ...scene, truth: { ...scene.truth, c: -scene.truth.c }, pairs: 1500 };

const nearPixel = PITCH_UM / 2;
const farPixel = farFieldK(PITCH_UM, 810, 100);

/** Truth of net numbers (blurred law) and of raw ones (moments of the mean map), pixel^2. */
function truthsOf(of: TallyScene) {
  const net = pairVariances(pixelBlurred(of.truth, 1, 1));
  const mean = meanJoint(of);
  const n = of.size;
  const sums = new Float64Array(MOMENT_SUMS);
  addMomentSums(mean, 0, n, n, 1, sums, 0);
  const raw = pairVariances(covarianceOfSums(sums)!);
  const kept = new Uint8Array(n).fill(1);
  // Columns of mean counts, divisor n: of the law itself, not of a sample.
  const conditional = weightedVariance(columnSums(mean, 0, n, n, 'x1'), 0, kept, 'n');
  return { net, raw: { ...raw, conditional1: conditional } };
}

const near = truthsOf(scene);
const far = truthsOf(farScene);
const area = (nearPixel * farPixel) ** 2 * 1e-6;

const request = (seed: number): FinishRequest => ({
  inputs: {
    near: countedTags(simulateTally(scene, createRandom(1000 + seed)), nearPlane),
    far: countedTags(simulateTally(farScene, createRandom(5000 + seed)), farPlane),
  },
  dials: fillDials(witnessStudy.info, { resamples: 200 }),
  seed,
  partial: false,
});

describe('Witness and widths of simulated joint counts with accidentals', () => {
  const requests = Array.from({ length: SEEDS }, (_, k) => request(k + 1));
  const witness = requests.map((one) => witnessStudy.finish(one));
  const joint = requests.map(({ inputs, seed, dials }) =>
    jointMapStudy.finish({ inputs: { data: inputs.near }, dials, seed, partial: false }),
  );
  const truths: [string, StudyOutput[], number][] = [
    ['reid.x.net', witness, near.net.conditional1 * far.net.conditional1 * area],
    ['reid.y.net', witness, near.net.conditional1 * far.net.conditional1 * area],
    ['reid.x.idler.net', witness, near.net.conditional2 * far.net.conditional2 * area],
    ['mancini.x.net', witness, near.net.minus * far.net.plus * area],
    ['mancini.y.net', witness, near.net.minus * far.net.plus * area],
    ['reid.xy.net', witness, near.net.conditional1 * far.net.conditional1 * area],
    ['reid.x.raw', witness, near.raw.conditional1 * far.raw.conditional1 * area],
    ['reid.y.raw', witness, near.raw.conditional1 * far.raw.conditional1 * area],
    ['mancini.x.raw', witness, near.raw.minus * far.raw.plus * area],
    ['mancini.y.raw', witness, near.raw.minus * far.raw.plus * area],
    ['width.x.minus.net', witness, nearPixel * Math.sqrt(near.net.minus)],
    ['width.x.plus.net', witness, farPixel * Math.sqrt(far.net.plus)],
    ['width.x.minus.fit', joint, nearPixel * Math.sqrt(near.net.minus)],
    ['width.y.plus.fit', joint, nearPixel * Math.sqrt(near.net.plus)],
    ['width.x.conditional.fit', joint, nearPixel * Math.sqrt(near.net.conditional1)],
  ];

  it.each(truths)('%s is unbiased and its errors cover', (id, outputs, truth) => {
    const found = outputs.map((output) => {
      const { value, sigma } = output.quantities[id]!;
      return { value, sigma, truth };
    });
    const { bias, coverage } = seedStatistics(found);
    expect(Math.abs(bias)).toBeLessThan(2);
    expect(coverage).toBeGreaterThanOrEqual(0.55);
    expect(coverage).toBeLessThanOrEqual(0.8);
  });

  it('has moments that hold the truth where the array cuts nothing', () => {
    const small: TallyScene = { ...scene, truth: { v1: 3.2, v2: 3.2, c: 2.5 }, accidentals: 100 };
    const truth = nearPixel * Math.sqrt(pairVariances(pixelBlurred(small.truth, 1, 1)).minus);
    const found = Array.from({ length: SEEDS }, (_, k) => {
      const data = countedTags(simulateTally(small, createRandom(9000 + k)), nearPlane);
      const dials = fillDials(jointMapStudy.info, { resamples: 200 });
      const output = jointMapStudy.finish({ inputs: { data }, dials, seed: k, partial: false });
      const { value, sigma } = output.quantities['width.x.minus.moment']!;
      return { value, sigma, truth };
    });
    const { bias, coverage } = seedStatistics(found);
    expect(Math.abs(bias)).toBeLessThan(2);
    expect(coverage).toBeGreaterThanOrEqual(0.55);
    expect(coverage).toBeLessThanOrEqual(0.8);
  });

  it('judges these states as violating the bounds that they violate', () => {
    const found = witness[0]!;
    const truth = near.net.conditional1 * far.net.conditional1 * area;
    expect(truth).toBeLessThan(0.25);
    expect(found.verdicts['reid.x.net']!.level).toBe('violated');
    expect(found.verdicts['reid.x.net']!.interval[1]).toBeLessThan(0.25);
  });
});
