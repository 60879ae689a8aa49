import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  displayUnit,
  formatCount,
  formatInterval,
  formatPlain,
  formatQuantity,
  formatRate,
  formatWithSigma,
  lastPlace,
} from '../../../../src/lib/format-number';

describe('formatWithSigma', () => {
  it.each([
    [1.23412, 0.0052, '1.234(5)'],
    [0.0264, 0.00081, '0.0264(8)'],
    [150.04, 1.49, '150.0(15)'],
    [10.317, 0.0496, '10.32(5)'],
    // 0.0952 would round to 0.10: the place is kept, the bracket says ten.
    [1.23456, 0.0962, '1.23(10)'],
    [-Math.PI, 0.02, '\u22123.14(2)'],
    [-0.0004, 0.02, '0.00(2)'],
    [12345, 230, '12300(200)'],
    [12345, 130, '12350(130)'],
    [26047, 161, '26050(160)'],
    [3.2e-7, 1.4e-8, '3.20(14)e\u22127'],
    [1.23456e9, 2.1e6, '1.235(2)e9'],
    [0.1, 25, '0(30)'],
    [26047, null, '26047'],
    [2.5, 0, '2.5'],
    [0.264, Number.POSITIVE_INFINITY, '0.26(?)'],
    [Number.NaN, 0.1, 'no value'],
  ])('%d with %d', (value, sigma, text) => {
    expect(formatWithSigma(value, sigma)).toBe(text);
  });

  it('shows two digits of sigma after a leading 1, else one', () => {
    fc.assert(
      fc.property(fc.double({ min: 1e-6, max: 1e6, noNaN: true }), (sigma) => {
        const digits = sigma / 10 ** lastPlace(sigma);
        expect(digits).toBeGreaterThanOrEqual(1.999);
        expect(digits).toBeLessThan(20.001);
      }),
    );
  });

  it('never moves the value by more than half of its last place', () => {
    const number = fc.double({ min: -1e4, max: 1e4, noNaN: true });
    fc.assert(
      fc.property(number, fc.double({ min: 1e-3, max: 1e3, noNaN: true }), (value, sigma) => {
        const text = formatWithSigma(value, sigma).replaceAll('\u2212', '-');
        const [, mantissa, exponent] = /^(-?[\d.]+)\(\d+\)(?:e(-?\d+))?$/.exec(text) ?? [];
        const shown = Number(mantissa) * 10 ** Number(exponent ?? 0);
        expect(Math.abs(shown - value)).toBeLessThanOrEqual(0.5001 * 10 ** lastPlace(sigma));
      }),
    );
  });
});

describe('units and rates', () => {
  it('reads stored units the way people do', () => {
    expect(displayUnit('hbar^2')).toBe('ħ²');
    expect(displayUnit('um')).toBe('µm');
    expect(displayUnit('1')).toBe('');
    expect(displayUnit('1/um')).toBe('1/µm');
    expect(displayUnit('rad/mm')).toBe('rad/mm');
  });

  it('gives rates a prefix', () => {
    expect(formatRate(12345, 56)).toBe('12.35(6) k/s');
    expect(formatRate(84.2e6, null)).toBe('84.2 M/s');
    expect(formatRate(12.3, 0.4)).toBe('12.3(4) /s');
    expect(formatQuantity({ value: 2500, sigma: 30, unit: '1/s' })).toBe('2.50(3) k/s');
    expect(formatQuantity({ value: 0.0264, sigma: 0.0008, unit: 'hbar^2' })).toBe('0.0264(8) ħ²');
  });
});

describe('plain numbers', () => {
  it('keeps six digits and no trailing zeros', () => {
    expect(formatPlain(1 / 3)).toBe('0.333333');
    expect(formatPlain(2.5)).toBe('2.5');
    expect(formatPlain(1234567.8)).toBe('1234568');
    expect(formatPlain(1.5e-9)).toBe('1.5e\u22129');
    expect(formatPlain(0)).toBe('0');
    expect(formatPlain(Number.NEGATIVE_INFINITY)).toBe('\u2212∞');
  });

  it('groups counts and rounds intervals to their width', () => {
    expect(formatCount(26047)).toBe('26\u2009047');
    expect(formatCount(1234)).toBe('1234');
    expect(formatInterval([0.02489, 0.02812])).toBe('[0.0249, 0.0281]');
  });
});
