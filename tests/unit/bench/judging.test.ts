import { describe, expect, it } from 'vitest';
import { assertSameAnswer } from '../../bench/compare';
import { judge, printMarkdown, type ReportRow } from '../../bench/report';
import { growthExponent, median } from '../../bench/statistics';

const held = (figure: number, smaller = false) => ({ figure, goal: 3, least: 2, label: '', smaller });

describe('what the bench makes of its figures', () => {
  it('judges by the worst of all marks', () => {
    expect(judge([held(3), held(4)])).toBe('goal');
    expect(judge([held(3), held(2.5)])).toBe('least');
    expect(judge([held(3), held(1.9)])).toBe('no');
    expect(judge([])).toBeNull();
    expect(judge([{ ...held(1.2, true), goal: 1, least: 1.5 }])).toBe('least');
    expect(judge([held(Number.NaN)])).toBe('no');
  });

  it('finds the exponent of a power law', () => {
    const points = [1e6, 2e6, 4e6].map((items) => ({ items, seconds: 3e-9 * items ** 1.2 }));
    expect(growthExponent(points)).toBeCloseTo(1.2, 10);
    expect(median([3, 1, 2])).toBe(2);
    expect(median([4, 1, 2, 3])).toBe(2.5);
  });

  it('tells equal answers from others, section by section', () => {
    const expected = Float64Array.of(1000, 0, 1, 2);
    const within = { tolerance: 1e-3, sections: 2 };
    expect(() => assertSameAnswer('it', Float64Array.of(1000.5, 0, 1, 2), expected, within)).not.toThrow();
    expect(() => assertSameAnswer('it', Float64Array.of(1000, 0, 1.1, 2), expected, within)).toThrow(
      'place 2',
    );
    expect(() =>
      assertSameAnswer('it', Float64Array.of(1, Number.NaN), Float64Array.of(1, 1), exact),
    ).toThrow();
    expect(() => assertSameAnswer('it', new Float64Array(3), expected, exact)).toThrow('3 numbers');
    expect(() => assertSameAnswer('it', new Float64Array(2), new Float64Array(2), exact)).toThrow('zero');
  });

  it('keeps rates of kernels and rows without a goal out of the table', () => {
    const row: ReportRow = {
      kernel: 'decode',
      rate: 123,
      unit: 'M records/s',
      ratioNumpy: 3,
      ratioCpp: null,
      peakMB: 9,
      growth: 1,
      goal: '3 x NumPy (2)',
      met: 'goal',
    };
    const own = { ...row, kernel: 'workers', unit: 'x one worker', ratioNumpy: null, growth: null };
    const lines = printMarkdown([row, own, { ...row, kernel: 'bare', goal: '' }]).split('\n');
    expect(lines.slice(2)).toEqual([
      '| decode |  | 3.00 | - | 1.00 | 3 x NumPy (2) | goal |',
      '| workers | 123 x one worker | - | - | - | 3 x NumPy (2) | goal |',
    ]);
  });
});

const exact = { tolerance: 0, sections: 1 };
