import { describe, expect, it } from 'vitest';
import { erf, erfc, normalCdf, normalPdf } from '../../shared/physics/special';

describe('special functions', () => {
  // Digits: erf and erfc of the C library (glibc), printed by Python; the first ten also stand in Abramowitz & Stegun,
  // Handbook of Mathematical Functions (1964), table 7.1.
  it.each([
    [0.1, 0.1124629160182849, 0.8875370839817152],
    [0.5, 0.5204998778130465, 0.4795001221869535],
    [1, 0.8427007929497149, 0.15729920705028513],
    [2, 0.9953222650189527, 0.004677734981047266],
    [3.5, 0.9999992569016276, 7.430983723414128e-7],
    [6, 1, 2.1519736712498913e-17],
    [10, 1, 2.088487583762545e-45],
  ])('erf and erfc of %d', (x, expectedErf, expectedErfc) => {
    expect(Math.abs(erf(x) / expectedErf - 1)).toBeLessThan(5e-15);
    expect(Math.abs(erfc(x) / expectedErfc - 1)).toBeLessThan(1e-14);
    expect(erf(-x)).toBe(-erf(x));
    expect(erfc(-x)).toBeCloseTo(2 - erfc(x), 15);
  });

  it('answers at the edges', () => {
    expect([erf(0), erfc(0), erf(Infinity), erfc(Infinity), erfc(-Infinity)]).toEqual([0, 1, 1, 0, 2]);
    expect(erf(Number.NaN)).toBeNaN();
    expect(erfc(Number.NaN)).toBeNaN();
  });

  it('makes the normal law', () => {
    expect(normalCdf(0)).toBe(0.5);
    expect(normalCdf(1) - normalCdf(-1)).toBeCloseTo(0.6826894921370859, 14);
    expect(normalPdf(0)).toBeCloseTo(1 / Math.sqrt(2 * Math.PI), 15);
    const h = 1e-5;
    expect((normalCdf(1.3 + h) - normalCdf(1.3 - h)) / (2 * h)).toBeCloseTo(normalPdf(1.3), 9);
  });
});
