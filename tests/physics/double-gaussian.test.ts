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
} from '../../shared/physics/double-gaussian';

describe('Check values of the double-Gaussian biphoton', () => {
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
