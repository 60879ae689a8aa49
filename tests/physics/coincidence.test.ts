import { describe, expect, it } from 'vitest';
import {
  accidentalsFromSingles,
  accidentalsFromWindows,
  coincidencesToAccidentals,
  heraldingEfficiency,
  netCoincidences,
} from '../../shared/physics/coincidence';
import { trueRateNonParalysable } from '../../shared/physics/dead-time';
import { propagate } from '../../shared/physics/estimate';

describe('accidentals', () => {
  it('A01: 1e5 and 8e4 per s, 2 ns full width, 10 s make 160', () => {
    // Law R1 R2 w: Eckart & Shonka, Phys. Rev. 53, 752 (1938), from memory.
    expect(accidentalsFromSingles(1e6, 8e5, 2e-9, 10).value).toBeCloseTo(160, 9);
  });

  it('A26: 5000 in the window, 1000 in a sideband ten times as wide', () => {
    // Poisson propagation, derived by numerics; Monte Carlo sd 70.94.
    const net = netCoincidences(5000, accidentalsFromWindows(1000, 10));
    expect(net.value).toBeCloseTo(4900, 9);
    expect(net.sigma).toBeCloseTo(70.78135347674555, 6);
  });

  it('counts both ends of a shared error: pairs move both singles', () => {
    const apart = accidentalsFromSingles(1000, 1000, 1e-6, 1);
    const together = accidentalsFromSingles(1000, 1000, 1e-6, 1, 1000);
    expect(together.sigma / apart.sigma).toBeCloseTo(Math.SQRT2, 12);
  });

  it('gives no number where there is none', () => {
    // One missed tag would have met all ten of the other arm.
    expect(accidentalsFromSingles(0, 10, 1e-9, 1)).toEqual({ value: 0, sigma: 1e-8 });
    expect(accidentalsFromSingles(10, 0, 1e-9, 1)).toEqual({ value: 0, sigma: 1e-8 });
    expect(accidentalsFromSingles(0, 0, 1e-9, 1)).toEqual({ value: 0, sigma: 1e-9 });
    // None seen is not none with certainty: one count is the scale of the error.
    expect(accidentalsFromWindows(0, 10)).toEqual({ value: 0, sigma: 0.1 });
    expect(coincidencesToAccidentals(10, { value: 0, sigma: 0 })).toBeNull();
    expect(coincidencesToAccidentals(0, { value: 3, sigma: 1 })).toBeNull();
  });
});

describe('CAR', () => {
  it('is true over accidental, with the delta-method error of independent counts', () => {
    const car = coincidencesToAccidentals(1100, accidentalsFromWindows(1000, 10));
    expect(car?.value).toBeCloseTo(10, 12);
    const numeric = propagate((x) => (x[0]! - x[1]! / 10) / (x[1]! / 10), [1100, 1000], [1100, 1000]);
    expect(car?.sigma).toBeCloseTo(numeric.sigma, 5);
  });
});

describe('heralding efficiency', () => {
  const request = {
    heralds: 100000,
    heraldDarks: 5000,
    inWindow: 20000,
    // A and D are each measured in a run of equal size.
    accidentals: { value: 400, sigma: 20 },
    fraction: { value: 1, sigma: 0 },
  };

  it('A11, A12: S 1e5, D 5000, C 20000, A 400', () => {
    // Klyshko, Sov. J. Quantum Electron. 10, 1112 (1980), from memory; error by the delta method, Monte Carlo 0.001365.
    const eta = heraldingEfficiency(request);
    expect(eta?.value).toBeCloseTo(0.2063157894736842, 9);
    expect(Math.abs((eta?.sigma ?? 0) - 0.0013636301793589142)).toBeLessThan(1e-5);
  });

  it('is divided by the share of the peak in the window', () => {
    const half = heraldingEfficiency({ ...request, fraction: { value: 0.5, sigma: 0.01 } });
    expect(half?.value).toBeCloseTo(2 * 0.2063157894736842, 9);
    expect(half?.sigma).toBeCloseTo(Math.hypot(2 * 0.00136363, 0.4126315789 * 0.02), 5);
    expect(heraldingEfficiency({ ...request, heraldDarks: 200000 })).toBeNull();
  });
});

describe('dead time', () => {
  // Laws: Knoll, Radiation Detection and Measurement, from memory, derived again and simulated.
  it('A16: non-paralysable, 1 Mcps, 50 ns', () => {
    expect(trueRateNonParalysable(1e6, 50e-9)).toBeCloseTo(1052631.5789473685, 3);
    expect(trueRateNonParalysable(2e7, 50e-9)).toBeNull();
  });
});
