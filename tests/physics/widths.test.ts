import { describe, expect, it } from 'vitest';
import { spreadOf } from '../../shared/physics/bootstrap';
import {
  deconvolvedDifferenceSigma,
  farFieldK,
  pixelVariance,
  planeScale,
  productRelativeError,
} from '../../shared/physics/calibration';
import { columnSums, conditionalVariance } from '../../shared/physics/conditional';
import { pairVariances } from '../../shared/physics/double-gaussian';
import { jackknifeSigma } from '../../shared/physics/jackknife';
import {
  addMomentSums,
  covarianceOfSums,
  ellipseCovariance,
  MOMENT_SUMS,
  pedestalVariance,
  sigmaRelativeError1d,
  sigmaRelativeError2d,
} from '../../shared/physics/moments';
import { createRandom } from '../../shared/util/random';

describe('Check values of widths and calibration', () => {
  it('adds a^2/12 per pixel and a^2/6 per difference (13 um; uniform law)', () => {
    expect(pixelVariance(13)).toBeCloseTo(14.083333333333334, 9);
    expect(2 * pixelVariance(13)).toBeCloseTo(28.166666666666668, 9);
  });

  it('takes pixels out of a difference width, or refuses', () => {
    expect(deconvolvedDifferenceSigma(12, 13)).toBeCloseTo(10.762589527308627, 6);
    expect(deconvolvedDifferenceSigma(6, 13)).toBeNull();
  });

  it('turns camera pixels into crystal units (k = 2 pi x / (lambda f), Goodman, Introduction to Fourier Optics, from memory)', () => {
    expect(farFieldK(16, 810, 150)).toBeCloseTo(0.8274153490936081, 9);
    const near = planeScale({ kind: 'near', magnification: { value: 3, sigma: 0.03 } });
    expect(16 * near.signal).toBeCloseTo(5.333333333333333, 9);
    expect(near.relative).toBeCloseTo(0.01, 12);
    const far = planeScale({
      kind: 'far',
      focalLengthMm: { value: 150, sigma: 1.5 },
      signalNm: { value: 810, sigma: 0 },
      idlerNm: { value: 1550, sigma: 0 },
    });
    expect(far.signal / far.idler).toBeCloseTo(1550 / 810, 9);
    expect(far.relative).toBeCloseTo(0.01, 12);
  });

  it('propagates 2, 3, 1 and 1.5 % to 8.0623 % of the product', () => {
    expect(productRelativeError([0.02, 0.03, 0.01, 0.015])).toBeCloseTo(0.0806225774829855, 9);
  });

  it('knows the second moment of a Gaussian cut at 2 and 3 sigma', () => {
    // Fine enough a grid stands for the continuous law; the closed form is 1 - 2 c phi(c) / (2 Phi(c) - 1).
    for (const [c, ratio] of [
      [2, 0.7737413035499232],
      [3, 0.9733369246625415],
    ] as const) {
      const n = 4001;
      const step = (2 * c) / n;
      const map = Float64Array.from({ length: n }, (_, i) =>
        Math.exp(-((step * (i - (n - 1) / 2)) ** 2) / 2),
      );
      const sums = new Float64Array(MOMENT_SUMS);
      addMomentSums(map, 0, n, 1, 1, sums, 0);
      expect((covarianceOfSums(sums)?.v1 ?? 0) * step * step).toBeCloseTo(ratio, 6);
    }
  });

  it('shows what a pedestal does to an unsubtracted moment', () => {
    expect(pedestalVariance(10, 0.1, 100)).toBeCloseTo(423.3333333333333, 6);
  });

  it('has the error laws of sigma (Fisher information)', () => {
    expect(sigmaRelativeError1d(500, 1, 0)).toBeCloseTo(0.03162277660168379, 9);
    expect(sigmaRelativeError1d(2000, 1, 2000)).toBeCloseTo(0.06160282219031066, 6);
    expect(sigmaRelativeError2d(2000, 1, 20000)).toBeCloseTo(0.2509120425005461, 6);
  });

  it('gives the conditional and the difference variance of a Gaussian joint law', () => {
    const found = pairVariances({ v1: 10, v2: 10, c: 8 });
    expect(found.conditional1).toBeCloseTo(3.6, 12);
    expect(found.minus).toBeCloseTo(4, 12);
  });

  it('gives the column-weighted conditional variance of a 3 x 3 map', () => {
    // Rows x1, columns x2 in the source; maps here are [x2][x1].
    const source = [
      [8, 2, 0],
      [3, 10, 3],
      [0, 4, 9],
    ];
    const map = Float64Array.from({ length: 9 }, (_, c) => source[c % 3]![Math.floor(c / 3)]!);
    const found = conditionalVariance(columnSums(map, 0, 3, 3, 'x1'), 'n');
    expect(found.value).toBeCloseTo(0.26107226107226106, 12);
    expect(found.discarded).toBe(0);
  });

  it('skips sparse columns and says how much that is', () => {
    const map = Float64Array.of(3, 3, 0, 1, 1, 1, 0, 4, 4);
    const found = conditionalVariance(columnSums(map, 0, 3, 3, 'x1'));
    expect(found.discarded).toBeCloseTo(3 / 17, 12);
    expect([...found.kept]).toEqual([1, 0, 1]);
    expect(conditionalVariance(new Float64Array(9)).value).toBeNaN();
  });

  it('divides by n - 1, so that sparse columns do not feign a violation', () => {
    const random = createRandom(5);
    let biased = 0;
    let fair = 0;
    const columns = 4000;
    const sums = new Float64Array(3 * columns);
    for (let k = 0; k < columns; k += 1) {
      for (let n = 0; n < 5; n += 1) {
        const x = random.normal();
        sums[3 * k] = sums[3 * k]! + 1;
        sums[3 * k + 1] = sums[3 * k + 1]! + x;
        sums[3 * k + 2] = sums[3 * k + 2]! + x * x;
      }
    }
    fair = conditionalVariance(sums, 'n-1').value;
    biased = conditionalVariance(sums, 'n').value;
    expect(biased).toBeCloseTo(0.8 * fair, 9);
    // 4000 columns of 4 degrees of freedom: standard error sqrt(2/16000) = 0.011.
    expect(Math.abs(fair - 1)).toBeLessThan(0.035);
  });

  it('has the jackknife error of a mean (Efron & Tibshirani, An Introduction to the Bootstrap, 1993, from memory)', () => {
    const mean = (values: readonly number[]) => values.reduce((a, b) => a + b, 0) / values.length;
    expect(jackknifeSigma([4.1, 3.8, 4.4, 4.0, 3.7], mean)).toBeCloseTo(0.12247448713915934, 9);
    expect(jackknifeSigma([1], mean)).toBeNaN();
  });

  it('turns an ellipse into its marginal covariance', () => {
    const [xx, xy, yy] = ellipseCovariance(3, 1, 30);
    expect(xx).toBeCloseTo(7, 9);
    expect(xy).toBeCloseTo(3.4641016151377544, 9);
    expect(yy).toBeCloseTo(3, 9);
  });

  it('says nothing about the spread of one value', () => {
    expect(spreadOf(Float64Array.of(1)).sigma).toBeNaN();
  });
});
