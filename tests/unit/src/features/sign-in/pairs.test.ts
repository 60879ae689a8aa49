import { describe, expect, it } from 'vitest';
import { countInBins, simulatePairs } from '../../../../../src/features/sign-in/model/pairs';

describe('the pairs of the sign-in page', () => {
  it('have opposite momenta with the blur asked for', () => {
    const pairs = simulatePairs(20_000, 0.16, 5);
    const sums = pairs.map(({ signal, idler }) => signal + idler);
    const variance = sums.reduce((sum, value) => sum + value * value, 0) / sums.length;
    // Standard error of a standard deviation: sigma / sqrt(2 n) = 0.5 %; four of them.
    expect(Math.abs(Math.sqrt(variance) / 0.16 - 1)).toBeLessThan(0.02);
    expect(simulatePairs(3, 0.16, 5)).toEqual(pairs.slice(0, 3));
  });

  it('are counted between the edges only', () => {
    expect(countInBins([-1, -0.99, 0, 0.99, 1, 7], 2, 1)).toEqual([2, 2]);
  });
});
