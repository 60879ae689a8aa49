import { describe, expect, it } from 'vitest';
import {
  drawBlockWeights,
  percentile,
  recentre,
  resampleSums,
  spreadOf,
} from '../../shared/physics/bootstrap';
import { pairVariances } from '../../shared/physics/double-gaussian';
import { fitPair } from '../../shared/physics/fit-pair';
import { FIT_PARAMETERS } from '../../shared/physics/fit-shape';
import { createRandom } from '../../shared/util/random';
import { simulateJoint } from './simulated-joint';

describe('Block bootstrap', () => {
  it('draws as many blocks as there are, the same for the same seed', () => {
    const weights = drawBlockWeights(50, 20, 3);
    for (let r = 0; r < 20; r += 1) {
      expect(weights.counts.subarray(r * 50, (r + 1) * 50).reduce((sum, w) => sum + w, 0)).toBe(50);
    }
    expect(drawBlockWeights(50, 20, 3).counts).toEqual(weights.counts);
  });

  it('gives the standard error of a sum: sqrt(n) times the scatter of the blocks', () => {
    const random = createRandom(4);
    const rows = Float64Array.from({ length: 100 }, () => random.normal());
    const sums = resampleSums(drawBlockWeights(100, 4000, 5), rows, 1);
    const mean = rows.reduce((sum, v) => sum + v, 0) / 100;
    const expected = Math.sqrt(rows.reduce((sum, v) => sum + (v - mean) ** 2, 0));
    // 4000 resamples tell a standard deviation to 1.1 %.
    expect(Math.abs(spreadOf(sums).sigma / expected - 1)).toBeLessThan(0.045);
  });

  it('interpolates percentiles and takes its own bias out', () => {
    expect(percentile(Float64Array.of(0, 1, 2, 3), 0.5)).toBe(1.5);
    expect([...recentre(Float64Array.of(1, 3), 4)]).toEqual([2, 6]);
  });

  it('has no spread where resampling often leaves no value', () => {
    const withGaps = (gaps: number) =>
      Float64Array.from({ length: 100 }, (_, k) => (k < gaps ? Number.NaN : k));
    expect(spreadOf(withGaps(2)).sigma).toBeGreaterThan(0);
    expect(spreadOf(withGaps(3)).sigma).toBeNaN();
  });
});

describe('Fit of a joint map', () => {
  const cases = [
    { name: 'a ridge of 0.4 pixels', narrow: 0.4, wide: 8, size: 16, accidentals: 300 },
    { name: 'a ridge in as many accidentals as pairs', narrow: 1.2, wide: 8, size: 16, accidentals: 3000 },
    { name: 'a 64 x 64 map', narrow: 3, wide: 30, size: 64, accidentals: 1000 },
  ];
  it.each(cases)('finds $name within its block errors', (one) => {
    const [u, v] = [one.narrow ** 2, one.wide ** 2];
    const input = simulateJoint(
      {
        n1: one.size,
        n2: one.size,
        slices: 80,
        truth: { v1: (u + v) / 4, v2: (u + v) / 4, c: (v - u) / 4 },
        centre1: one.size / 2 - 0.3,
        centre2: one.size / 2 - 0.6,
        pairs: 3000,
        accidentals: one.accidentals,
        windows: 10,
        flat: 0.2,
      },
      createRandom(21),
    );
    const found = fitPair(input)!;
    expect(found.fit.converged).toBe(true);
    const move = (s: number, p: number): number => found.influence[s * FIT_PARAMETERS + p]!;
    const moves = Array.from({ length: 80 }, (_, s) => move(s, 3) + move(s, 5) - 2 * move(s, 4));
    const mean = moves.reduce((sum, m) => sum + m, 0) / 80;
    const sigma = Math.sqrt(moves.reduce((sum, m) => sum + (m - mean) ** 2, 0));
    expect(Math.abs(pairVariances(found.blurred).minus - (u + 1 / 6))).toBeLessThan(4 * sigma);
    expect(found.chi2 / found.ndf).toBeLessThan(1.5);
    // At the maximum the slices' pushes cancel.
    expect(Math.abs(mean * 80)).toBeLessThan(0.6 * sigma);
  });

  it('has nothing to fit in an empty map', () => {
    const nothing = new Float64Array(2 * 9);
    const flat = new Float64Array(3).fill(1);
    const input = { n1: 3, n2: 3, slices: 2, prompt: nothing, shifted: nothing, windows: 4 };
    expect(fitPair({ ...input, singles1: flat, singles2: flat, open1: flat, open2: flat })).toBeNull();
  });
});
