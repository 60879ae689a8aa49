import { describe, expect, it } from 'vitest';
import {
  accidentalsFromSingles,
  accidentalsFromWindows,
  coincidencesToAccidentals,
  expectedCar,
  gateAccidental,
  heraldingEfficiency,
  netCoincidences,
} from '../../shared/physics/coincidence';
import {
  afterpulseGain,
  afterpulseProbability,
  largestParalysableRate,
  trueRateNonParalysable,
  trueRateParalysable,
} from '../../shared/physics/dead-time';
import { propagate } from '../../shared/physics/estimate';
import { heraldedG2, heraldedG2ManyModes, heraldedG2OneMode } from '../../shared/physics/heralded-g2';
import { createRandom } from '../../shared/util/random';

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

  it('E19: 2e5 per s in a 5 ns gate', () => {
    // Poisson, derived by numerics.
    expect(gateAccidental(2e5, 5e-9)).toBeCloseTo(0.000999500166624978, 12);
  });
});

describe('CAR', () => {
  it('A10: 1e6 pairs/s, efficiencies 0.20 and 0.25, darks 200 and 300, 1 ns', () => {
    // Formula derived by numerics; without darks it is 1/(R w) = 1000.
    const model = { pairRate: 1e6, efficiencyA: 0.2, efficiencyB: 0.25, windowS: 1e-9, fraction: 1 };
    expect(expectedCar({ ...model, darkA: 200, darkB: 300 })).toBeCloseTo(997.8036346394316, 6);
    expect(expectedCar({ ...model, darkA: 0, darkB: 0 })).toBeCloseTo(1000, 9);
  });

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

describe('dead time and afterpulsing', () => {
  // Laws: Knoll, Radiation Detection and Measurement, from memory, derived again and simulated.
  it('A16: non-paralysable, 1 Mcps, 50 ns', () => {
    expect(trueRateNonParalysable(1e6, 50e-9)).toBeCloseTo(1052631.5789473685, 3);
    expect(trueRateNonParalysable(2e7, 50e-9)).toBeNull();
  });

  it('A17: paralysable, 0.8 Mcps, 100 ns', () => {
    expect(trueRateParalysable(8e5, 100e-9)).toBeCloseTo(872977.2086157993, 3);
  });

  it('A18: the most a paralysable counter reports, 100 ns', () => {
    expect(largestParalysableRate(100e-9)).toBeCloseTo(3678794.411714424, 2);
    expect(trueRateParalysable(3678795, 100e-9)).toBeNull();
    expect(trueRateParalysable(3678794, 100e-9)).toBeGreaterThan(9.9e6);
  });

  it('inverts its own law over the whole branch', () => {
    for (const n of [1, 1e3, 1e5, 1e6, 5e6, 9e6]) {
      expect(trueRateParalysable(n * Math.exp(-n * 1e-7), 1e-7)! / n).toBeCloseTo(1, 9);
    }
  });

  it('A19, A28: afterpulses', () => {
    // Geometric series; excess of the autocorrelation over the counts. Both derived by numerics.
    expect(afterpulseGain(0.02)).toBeCloseTo(1.0204081632653061, 9);
    expect(afterpulseProbability(2500, 500, 100000)).toBeCloseTo(0.02, 12);
  });
});

describe('heralded g2(0)', () => {
  it('A15: 1e6 heralds, 4e4 and 3.8e4 two-folds, 30 three-folds', () => {
    // Grangier, Roger & Aspect, Europhys. Lett. 1, 173 (1986), from memory; Monte Carlo sd 0.00361.
    const g2 = heraldedG2({ heralds: 1e6, heraldAnd1: 40000, heraldAnd2: 38000, threeFold: 30 });
    expect(g2?.value).toBeCloseTo(0.019736842105263157, 9);
    expect(Math.abs((g2?.sigma ?? 0) - 0.003606156500113316)).toBeLessThan(1e-4);
    expect(g2?.upperLimit).toBeNull();
  });

  it('gives the 95 % limit of 3.00 counts when no three-fold was seen', () => {
    const g2 = heraldedG2({ heralds: 1e6, heraldAnd1: 1000, heraldAnd2: 1000, threeFold: 0 });
    expect(g2?.value).toBe(0);
    expect(g2?.upperLimit).toBeCloseTo(2.9957, 3);
    expect(heraldedG2({ heralds: 10, heraldAnd1: 0, heraldAnd2: 1, threeFold: 0 })).toBeNull();
  });

  it('A13, A14: expected for one and for many modes at 0.1 pairs', () => {
    // Closed forms derived by numerics; number-basis sum.
    expect(heraldedG2OneMode(0.1)).toBeCloseTo(0.3194444444444445, 9);
    expect(heraldedG2ManyModes(0.1)).toBeCloseTo(0.17355371900826455, 9);
  });

  it('has the error that simulated counts show', () => {
    const random = createRandom(7);
    const values: number[] = [];
    for (let n = 0; n < 2000; n++) {
      const threeFold = random.poisson(30);
      const heraldAnd1 = random.poisson(4000);
      const heraldAnd2 = random.poisson(3800);
      values.push(heraldedG2({ heralds: 1e5, heraldAnd1, heraldAnd2, threeFold })?.value ?? 0);
    }
    const mean = values.reduce((a, b) => a + b) / values.length;
    const sd = Math.sqrt(values.reduce((a, b) => a + (b - mean) ** 2, 0) / values.length);
    const law = heraldedG2({ heralds: 1e5, heraldAnd1: 4000, heraldAnd2: 3800, threeFold: 30 });
    expect(sd / (law?.sigma ?? 0)).toBeGreaterThan(0.95);
    expect(sd / (law?.sigma ?? 0)).toBeLessThan(1.05);
  });
});
