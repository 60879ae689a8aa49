import { describe, expect, it } from 'vitest';
import { findPeak, largestNoise, poissonZ } from '../../shared/physics/find-peak';
import { centreErrorLaw, fitPeak, peakModel } from '../../shared/physics/fit-peak';
import {
  bestHalfWindow,
  countRate,
  fanoFactor,
  g2,
  peakSigmaFromFwhm,
  thermalG2,
  windowFraction,
  windowFractionOfFit,
} from '../../shared/physics/timing';
import { createRandom } from '../../shared/util/random';
import { seedStatistics } from '../support/seed-statistics';

describe('rates', () => {
  it('A29: 250000 counts in 10 s', () => {
    // N/T, sqrt(N)/T: Poisson statistics.
    const { value, sigma } = countRate(250000, 10);
    expect([value, sigma]).toEqual([25000, 50]);
  });

  it('knows steady counts from drifting ones by their Fano factor', () => {
    const random = createRandom(3);
    const steady = Float64Array.from({ length: 400 }, () => random.poisson(50));
    const drifting = Float64Array.from({ length: 400 }, (_, k) => random.poisson(25 + k / 8));
    const factor = fanoFactor(steady);
    expect(Math.abs((factor?.value ?? 0) - 1)).toBeLessThan(3 * (factor?.sigma ?? 0));
    expect(fanoFactor(drifting)?.value).toBeGreaterThan(2);
    expect(fanoFactor([])).toBeNull();
    expect(fanoFactor([0, 0])).toBeNull();
  });
});

describe('g2', () => {
  it('A02: 1600 counts, 1e5 and 8e4 per s, 1 ns, 100 s', () => {
    // Formula derived by numerics.
    const one = g2({ pairs: 1600, countsA: 1e7, countsB: 8e6, binS: 1e-9, tauS: 0, spanS: 100 });
    expect(one?.value).toBeCloseTo(2, 9);
    expect(one?.sigma).toBeCloseTo(2 * Math.sqrt(1 / 1600 + 1e-7 + 1 / 8e6), 9);
  });

  it('counts the overlap of the two records', () => {
    const at = (tauS: number) => g2({ pairs: 100, countsA: 1e4, countsB: 1e4, binS: 1e-3, tauS, spanS: 10 });
    expect(at(5)!.value / at(0)!.value).toBeCloseTo(2, 12);
    expect(at(-5)?.value).toBe(at(5)?.value);
    expect(at(10)).toBeNull();
  });

  it('A27: four thermal modes', () => {
    // Mandel & Wolf, Optical Coherence and Quantum Optics (1995), from memory.
    expect(thermalG2(4)).toBe(1.25);
  });
});

describe('the coincidence window', () => {
  it('A06, A07: what 1 ns keeps of a peak of 0.25 ns, centred and 0.2 ns off', () => {
    // erf and quadrature.
    expect(windowFraction(1, 0.25, 0)).toBeCloseTo(0.9544997361036416, 9);
    expect(windowFraction(1, 0.25, 0.2)).toBeCloseTo(0.8823751994478637, 9);
    expect(windowFraction(1, 0.25, -0.2)).toBeCloseTo(0.8823751994478637, 9);
  });

  it('A08: the best half-window among accidentals is 1.4 sigma', () => {
    // Stationarity root and direct maximisation; the full window keeps 83.85 %.
    expect(Math.abs(bestHalfWindow() - 1.3999852768782846)).toBeLessThan(1e-4);
    expect(windowFraction(2 * bestHalfWindow(), 1, 0)).toBeCloseTo(0.8385, 3);
  });

  it('carries the error of the fit to the kept share', () => {
    const fit = { sigma: 0.25, sigmaError: 0.01, centreError: 0.02, centreSigmaCov: 0 };
    const h = 1e-6;
    const perSigma = (windowFraction(1, 0.25 + h, 0.2) - windowFraction(1, 0.25 - h, 0.2)) / (2 * h);
    const perOffset = (windowFraction(1, 0.25, 0.2 + h) - windowFraction(1, 0.25, 0.2 - h)) / (2 * h);
    const share = windowFractionOfFit(1, 0.2, fit);
    expect(share.sigma).toBeCloseTo(Math.hypot(perSigma * 0.01, perOffset * 0.02), 8);
  });

  it('A09: jitters of 350, 350 and 50 ps FWHM', () => {
    // Quadrature law and sampled sum.
    expect(peakSigmaFromFwhm([350, 350, 50])).toBeCloseTo(211.26613033683915, 6);
  });
});

describe('finding the peak', () => {
  it('A25: noise reaches about sqrt(2 ln M) among M bins', () => {
    // Upper guide; the mean maximum of 1e7 Gaussians by quadrature is 5.301.
    expect(largestNoise(1e7)).toBeCloseTo(5.67769242755511, 9);
  });

  it('measures an excess as (n - mean)/sqrt(mean) where counts are many', () => {
    expect(poissonZ(10300, 10000)).toBeCloseTo(3, 1);
    expect(poissonZ(9700, 10000)).toBeCloseTo(-3, 1);
    expect(poissonZ(0, 2)).toBeCloseTo(-2, 12);
  });

  it('finds no peak in noise, whatever its level', () => {
    for (let seed = 1; seed <= 60; seed++) {
      const random = createRandom(seed);
      const mean = 10 ** (4 * random.uniform() - 3);
      const counts = Float64Array.from({ length: 5000 }, () => random.poisson(mean));
      expect(findPeak({ lo: 0, step: 1, counts })).toBeNull();
    }
  });

  it('finds a narrow and a wide peak on a base', () => {
    for (const sigma of [0.4, 3, 40]) {
      const found = findPeak(simulatedPeak(11, 4000, 1234.5, sigma, 5, 4000));
      expect(Math.abs((found?.centre ?? 0) - 1234.5)).toBeLessThan(Math.max(1, 2 * sigma));
    }
  });
});

describe('fitting the peak', () => {
  it('A30, A32: error of the centre, on nothing and on a base', () => {
    // Fisher information of a Gaussian on a flat base: sigma/sqrt(N); sqrt(1/N + 4 sqrt(pi) sigma b/N^2).
    expect(centreErrorLaw(150, 900, 0)).toBeCloseTo(5, 12);
    expect(centreErrorLaw(1, 900, 20000)).toBeCloseTo(0.4197240540770985, 9);
  });

  it('is unbiased and knows its errors over 300 simulated histograms', () => {
    const truth = { area: 800, centre: 101.3, sigma: 4, base: 6 };
    const keys = ['area', 'centre', 'sigma', 'base'] as const;
    const fits = Array.from({ length: 300 }, (_, n) => {
      const fit = fitPeak(simulatedPeak(n + 1, 800, 101.3, 4, 6, 200), { ...truth, centre: 100, sigma: 6 });
      if (fit === null) throw new Error('a clear peak was not fitted');
      return fit;
    });
    for (const key of keys) {
      const { bias, coverage } = seedStatistics(
        fits.map((fit) => ({ value: fit[key], sigma: fit[`${key}Error`], truth: truth[key] })),
      );
      // Four numbers are asked at once, so three standard errors of the mean; over 4000 seeds all stay within two.
      expect(Math.abs(bias), key).toBeLessThan(3);
      expect(coverage, key).toBeGreaterThan(0.6);
      expect(coverage, key).toBeLessThan(0.77);
    }
  });

  it('has the centre error of the law where the base dominates', () => {
    const counts = Float64Array.from({ length: 400 }, (_, m) =>
      peakModel({ area: 900, centre: 200, sigma: 10, base: 200 }, 0, 1, m),
    );
    const fit = fitPeak({ lo: 0, step: 1, counts }, { area: 500, centre: 195, sigma: 8, base: 150 });
    expect(fit?.centre).toBeCloseTo(200, 4);
    expect(fit?.sigma).toBeCloseTo(10, 4);
    // The law is an expansion for a peak that is small against the base (0.42 against the exact 0.4204 of its source).
    expect((fit?.centreError ?? 0) / centreErrorLaw(10, 900, 200)).toBeGreaterThan(0.97);
    expect((fit?.centreError ?? 0) / centreErrorLaw(10, 900, 200)).toBeLessThan(1.03);
  });

  it('declines what is no peak', () => {
    const flat = new Float64Array(100).fill(5);
    const fit = fitPeak({ lo: 0, step: 1, counts: flat }, { area: 10, centre: 50, sigma: 3, base: 5 });
    expect(fit === null || fit.area < 3 * fit.areaError).toBe(true);
  });
});

/** Poisson counts of a Gaussian of mean `area` on a base per unit bin from 0. */
function simulatedPeak(
  seed: number,
  area: number,
  centre: number,
  sigma: number,
  base: number,
  bins: number,
): { lo: number; step: number; counts: Float64Array } {
  const random = createRandom(seed);
  const model = { area, centre, sigma, base };
  const counts = Float64Array.from({ length: bins }, (_, m) => random.poisson(peakModel(model, 0, 1, m)));
  return { lo: 0, step: 1, counts };
}
