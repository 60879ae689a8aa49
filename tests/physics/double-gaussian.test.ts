import { describe, expect, it } from 'vitest';
import {
  crystalDeltaUm,
  doubleGaussianWidths,
  farCovariance,
  manciniProduct,
  nearCovariance,
  pairVariances,
  pixelBlurred,
  reidProduct,
  schmidtNumber,
  sincAlpha,
} from '../../shared/physics/double-gaussian';

const sinc = (x: number): number => Math.sin(x) / x;

function root(f: (x: number) => number, low: number, high: number): number {
  let [a, b] = [low, high];
  for (let k = 0; k < 100; k += 1) {
    const middle = (a + b) / 2;
    if (f(a) * f(middle) <= 0) b = middle;
    else a = middle;
  }
  return (a + b) / 2;
}

describe('Check values of the double-Gaussian biphoton', () => {
  it('has the alphas of the sinc stand-in', () => {
    // Equal 1/e amplitude: Chan, Torres & Eberly, PRA 75, 050101 (2007), quoted as 0.455 (from memory).
    expect(1 / root((x) => sinc(x) - Math.exp(-1), 1, 3)).toBeCloseTo(0.4547267104391095, 9);
    expect(sincAlpha.amplitude).toBeCloseTo(0.4547267104391095, 6);
    // Equal FWHM of the intensity: sinc^2(x) = 1/2 and exp(-2 alpha x) = 1/2.
    const half = root((x) => sinc(x) ** 2 - 0.5, 1, 2);
    expect(Math.log(2) / (2 * half)).toBeCloseTo(0.2490544735679113, 9);
    expect(sincAlpha.fwhm).toBeCloseTo(0.2490544735679113, 6);
    // Largest 2-D overlap: overlap^2 = (4/pi) alpha atan(1/alpha)^2 is stationary there and 0.8217.
    const overlap = (a: number): number => (4 / Math.PI) * a * Math.atan(1 / a) ** 2;
    expect(overlap(sincAlpha.overlap)).toBeCloseTo(0.8217, 4);
    expect(overlap(sincAlpha.overlap)).toBeGreaterThan(overlap(0.71));
    expect(overlap(sincAlpha.overlap)).toBeGreaterThan(overlap(0.727));
    expect(sincAlpha.momentum).toBeCloseTo(1 / 3, 9);
    // Behind Schneeloch & Howell, J. Opt. 18, 053501 (2016) (formula from memory).
    expect(sincAlpha.position).toBeCloseTo(1.8, 9);
  });

  it('gives d and r of a 2 mm crystal pumped at 405 nm', () => {
    const delta = crystalDeltaUm(2, 405, 1.66, 0.455);
    expect(Math.abs(delta - 5.944348043356229)).toBeLessThan(1e-4);
    expect(Math.abs(500 / delta - 84.11351360202251)).toBeLessThan(1e-3);
  });

  it('gives Schmidt number and products at r = 4 (Law & Eberly 2004; Fedorov et al. 2004, from memory)', () => {
    expect(schmidtNumber(4)).toBeCloseTo(2.125, 9);
    expect(schmidtNumber(4) ** 2).toBeCloseTo(4.515625, 9);
    expect(reidProduct(4)).toBeCloseTo(0.05536332179930796, 9);
    expect(manciniProduct(4)).toBeCloseTo(0.0625, 9);
    expect(reidProduct(4)).toBeCloseTo(1 / (4 * schmidtNumber(4) ** 2), 12);
    const { xSingleUm, xConditionalUm } = doubleGaussianWidths({ waistUm: 40, deltaUm: 10 });
    expect(xSingleUm / xConditionalUm).toBeCloseTo(2.125, 9);
  });

  it('gives the conditional widths of w = 500 um, d = 8 um', () => {
    const widths = doubleGaussianWidths({ waistUm: 500, deltaUm: 8 });
    expect(widths.xConditionalUm).toBeCloseTo(7.998976196566066, 6);
    expect(widths.kConditionalPerMm).toBeCloseTo(1.9997440491415166, 9);
  });

  it('has covariances that agree with the widths', () => {
    const state = { waistUm: 60, deltaUm: 9 };
    const widths = doubleGaussianWidths(state);
    const near = pairVariances(nearCovariance(state));
    const far = pairVariances(farCovariance(state));
    expect(Math.sqrt(near.minus)).toBeCloseTo(widths.xMinusUm, 9);
    expect(Math.sqrt(near.plus)).toBeCloseTo(widths.xPlusUm, 9);
    expect(Math.sqrt(near.conditional1)).toBeCloseTo(widths.xConditionalUm, 9);
    expect(Math.sqrt(far.plus)).toBeCloseTo(widths.kPlusPerMm, 9);
    expect(Math.sqrt(far.minus)).toBeCloseTo(widths.kMinusPerMm, 9);
    expect(Math.sqrt(far.conditional1)).toBeCloseTo(widths.kConditionalPerMm, 9);
    expect(near.conditional1 * far.conditional1 * 1e-6).toBeCloseTo(reidProduct(60 / 9), 12);
    expect(near.minus * far.plus * 1e-6).toBeCloseTo(manciniProduct(60 / 9), 12);
  });

  it('adds a^2/6 to the difference of two pixel coordinates', () => {
    const truth = nearCovariance({ waistUm: 60, deltaUm: 9 });
    const blurred = pixelBlurred(truth, 13, 13);
    expect(pairVariances(blurred).minus - pairVariances(truth).minus).toBeCloseTo(28.166666666666668, 9);
  });
});
