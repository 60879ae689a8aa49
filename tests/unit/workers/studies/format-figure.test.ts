import { describe, expect, it } from 'vitest';
import { formatFigure, formatMeasured } from '../../../../workers/studies/format-figure';

describe('Numbers in sentences', () => {
  it('keep every digit left of the decimal point', () => {
    expect(formatFigure(23_705)).toBe('23705');
    expect(formatFigure(23_705.4)).toBe('23705');
    expect(formatFigure(-1_234_567)).toBe('-1234567');
    expect(formatFigure(999.96)).toBe('1000');
    expect(formatFigure(12.3456)).toBe('12.35');
    expect(formatFigure(0.000123456)).toBe('0.0001235');
  });

  it('take their digits from the error where there is one', () => {
    expect(formatMeasured(23_702.345, 2.04)).toBe('23702.3 ± 2.0');
    expect(formatMeasured(23_702.345, 340)).toBe('23702 ± 340');
  });
});
