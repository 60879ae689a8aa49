import { describe, expect, it } from 'vitest';
import { farCovariance, nearCovariance, pairVariances } from '../../shared/physics/double-gaussian';
import { duanSum, judge, significanceOf, verdictLevel, witnesses } from '../../shared/physics/witness';

describe('Check values of the variance witnesses', () => {
  it('keeps every bound with its inequality (Reid 1989; Mancini 2002; Duan, Simon 2000, from memory)', () => {
    expect(witnesses.reid.bound).toBe(0.25);
    expect(witnesses.mancini.bound).toBe(1);
    expect(witnesses.rotated.bound).toBe(0.25);
    expect(witnesses.duan.bound).toBe(2);
  });

  it('lets the vacuum saturate them: variances 1/2 in x and k', () => {
    // Plain difference and sum: (0.5 + 0.5)^2 = 1; rotated by sqrt 2: a quarter of it.
    expect((0.5 + 0.5) * (0.5 + 0.5)).toBe(witnesses.mancini.bound);
    expect(0.5 * 0.5).toBe(witnesses.rotated.bound);
    expect(duanSum(1, 1)).toBe(witnesses.duan.bound);
    // A double Gaussian with w = d is a product state.
    const near = pairVariances(nearCovariance({ waistUm: 30, deltaUm: 30 }));
    const far = pairVariances(farCovariance({ waistUm: 30, deltaUm: 30 }));
    expect(near.conditional1 * far.conditional1 * 1e-6).toBeCloseTo(witnesses.reid.bound, 12);
    expect(near.minus * far.plus * 1e-6).toBeCloseTo(witnesses.mancini.bound, 12);
  });

  it('has the Duan sum at its best scale (Duan et al., PRL 84, 2722 (2000), from memory)', () => {
    expect(duanSum(0.09, 0.16)).toBeCloseTo(0.24, 9);
  });

  it('reads published widths: 0.027 mm and 3.7 /mm give the 0.01 hbar^2 of Howell et al., PRL 92, 210403 (2004)', () => {
    expect(Math.abs(0.027 ** 2 * 3.7 ** 2 - 0.00998001)).toBeLessThan(0.0005);
    // Edgar et al., Nat. Commun. 3, 984 (2012): "more than two orders of magnitude" means below bound/100.
    expect(witnesses.reid.bound / 100).toBeCloseTo(0.0025, 9);
  });

  it('headlines the smaller, logarithmic significance of 0.026 +- 0.003 against 1/4', () => {
    const z = significanceOf(0.026, 0.003, witnesses.reid.bound);
    expect(witnesses.reid.bound / 0.026).toBeCloseTo(9.615384615384615, 6);
    expect(z.linear).toBeCloseTo(74.66666666666667, 6);
    expect(z.log).toBeCloseTo(19.615824625286624, 6);
  });

  it('never lets the logarithmic significance exceed the linear one', () => {
    for (const value of [0.001, 0.1, 0.24, 0.26, 1, 10]) {
      const z = significanceOf(value, 0.05 * value, 0.25);
      expect(z.log).toBeLessThanOrEqual(z.linear + 1e-12);
    }
  });
});

describe('Verdicts', () => {
  it('follow the thresholds', () => {
    expect(verdictLevel(5, [0.1, 0.2], 0.25)).toBe('violated');
    expect(verdictLevel(6, [0.1, 0.26], 0.25)).toBe('indicated');
    expect(verdictLevel(3.2, [0.1, 0.24], 0.25)).toBe('indicated');
    expect(verdictLevel(2.9, [0.1, 0.24], 0.25)).toBe('inconclusive');
    expect(verdictLevel(-0.5, [0.2, 0.3], 0.25)).toBe('inconclusive');
    expect(verdictLevel(-4, [0.26, 0.3], 0.25)).toBe('not-violated');
  });

  it('say the number of resamples above the bound and the assumptions', () => {
    const verdict = judge({
      witness: witnesses.reid,
      axis: 'x',
      value: 0.026,
      spread: { sigma: 0.003, interval: [0.021, 0.032], mean: 0.026 },
      resampled: new Float64Array(1000).fill(0.026),
      systematic: 0,
      doubts: null,
      assumptions: 'Assumes fair sampling.',
    });
    expect(verdict.level).toBe('violated');
    expect(verdict.significance).toBeCloseTo(19.6158, 3);
    expect(verdict.sentence).toContain('19.6 standard deviations below the bound 0.25');
    expect(verdict.sentence).toContain('none of 1000 resamples');
    expect(verdict.sentence).toContain('Assumes fair sampling.');
  });

  it('do not call a value above the bound a violation', () => {
    const verdict = judge({
      witness: witnesses.mancini,
      axis: 'y',
      value: 1.4,
      spread: { sigma: 0.05, interval: [1.3, 1.5], mean: 1.4 },
      resampled: new Float64Array(100).fill(1.4),
      systematic: 0,
      doubts: null,
      assumptions: '',
    });
    expect(verdict.level).toBe('not-violated');
    expect(verdict.significance).toBeLessThan(0);
    expect(verdict.sentence).toContain('no entanglement is shown');
  });

  const below = {
    witness: witnesses.reid,
    axis: 'x',
    value: 0.2,
    spread: { sigma: 0.004, interval: [0.192, 0.208] as [number, number], mean: 0.2 },
    resampled: new Float64Array(100).fill(0.2),
    systematic: 0,
    doubts: null,
    assumptions: '',
  };

  it('claim nothing where the planes leave doubts', () => {
    const verdict = judge({ ...below, doubts: 'in the near field no Gaussian fits' });
    expect(verdict.level).toBe('inconclusive');
    expect(verdict.sentence).toBe('No verdict on the Reid product in x: in the near field no Gaussian fits.');
  });

  it('only indicate what twice the calibration error would undo', () => {
    expect(judge({ ...below, systematic: 0.12 }).level).toBe('violated');
    const shaken = judge({ ...below, systematic: 0.13 });
    expect(shaken.level).toBe('indicated');
    expect(shaken.sentence).toContain('twice the calibration error of 13.0 %');
  });

  it('count a resample without a value as reaching the bound', () => {
    const resampled = Float64Array.from({ length: 100 }, (_, k) => (k === 7 ? Number.NaN : 0.2));
    expect(judge({ ...below, resampled }).sentence).toContain('1 of 100 resamples reach it');
  });
});
