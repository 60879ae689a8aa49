import { describe, expect, it } from 'vitest';
import {
  ghostContrastToNoise,
  ghostVisibility,
  otsuThreshold,
  type RegionMean,
  visibilityOf,
} from '../../shared/physics/ghost-image';
import { createRandom } from '../../shared/util/random';

const S = 100;
const B = 40;
const level = (raw: number, accidentals: number, pixels: number, windows: number): RegionMean => ({
  raw,
  rawVariance: raw / pixels,
  accidentals,
  accidentalsVariance: accidentals / windows / pixels,
});

describe('ghost image contrast', () => {
  it('E15: CNR of S = 100 above B = 40', () => {
    // Poisson; Monte Carlo 7.454.
    const cnr = ghostContrastToNoise(level(S + B, B, 20, 10), level(B, B, 20, 10), 10, false);
    expect(cnr.value).toBeCloseTo(7.453559924999299, 9);
  });

  it('E16: visibility without and with subtraction', () => {
    const open = level(S + B, B, 20, 10);
    const closed = level(B, B, 20, 10);
    expect(ghostVisibility(open, closed, false).value).toBeCloseTo(0.5555555555555556, 9);
    expect(ghostVisibility(open, closed, true).value).toBeCloseTo(1, 9);
    expect(visibilityOf(0, 0)).toBe(0);
  });

  it('has the spread that simulated images show, raw and net', () => {
    const random = createRandom(5);
    const windows = 10;
    const region = (mean: number, pixels: number): RegionMean => {
      const raw = random.poisson(mean * pixels) / pixels;
      const shifted = random.poisson(B * windows * pixels) / pixels;
      return {
        raw,
        rawVariance: raw / pixels,
        accidentals: shifted / windows,
        accidentalsVariance: shifted / pixels / windows ** 2,
      };
    };
    const found = Array.from({ length: 1500 }, () => [region(S + B, 12), region(B, 30)] as const);
    for (const net of [false, true]) {
      for (const estimate of [
        (o: RegionMean, c: RegionMean) => ghostVisibility(o, c, net),
        (o: RegionMean, c: RegionMean) => ghostContrastToNoise(o, c, windows, net),
      ]) {
        const values = found.map(([o, c]) => estimate(o, c).value);
        const mean = values.reduce((a, b) => a + b) / values.length;
        const sd = Math.sqrt(values.reduce((a, b) => a + (b - mean) ** 2, 0) / values.length);
        const claimed = estimate(level(S + B, B, 12, windows), level(B, B, 30, windows)).sigma;
        expect(Math.abs(sd / claimed - 1)).toBeLessThan(0.06);
      }
    }
  });
});

describe('splitting at a threshold', () => {
  it('parts two groups between them', () => {
    const threshold = otsuThreshold([1, 2, 1.5, 9, 10, 8]);
    expect(threshold).toBeGreaterThan(2);
    expect(threshold).toBeLessThan(8);
  });

  it('finds nothing to part in one value', () => {
    expect(otsuThreshold([3, 3, 3])).toBeNull();
    expect(otsuThreshold([])).toBeNull();
  });
});
