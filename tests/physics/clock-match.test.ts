import { describe, expect, it } from 'vitest';
import { findCoarseMatch } from '../../shared/physics/clock-coarse';
import { fitLine } from '../../shared/physics/clock-line';
import { type ClockFile, matchClocks, offsetAtZero } from '../../shared/physics/clock-match';
import { binDifferences } from '../../shared/physics/clock-peak';
import { createRandom } from '../../shared/util/random';
import { seedStatistics } from '../support/seed-statistics';
import { type ClockTruth, clockFile, quickSearches, simulateClocks } from './simulated-clocks';

const truth: ClockTruth = {
  seconds: 6,
  rates: [2e4, 3e4],
  pairs: 3e3,
  offsetPs: 2.1e10,
  drift: 4e-6,
  jitterPs: 150,
};

async function match(given: ClockTruth, seed: number) {
  const { main, companion } = simulateClocks(given, seed);
  const found = await matchClocks(
    clockFile(main),
    clockFile(companion),
    [companion[0]! - main[0]!],
    quickSearches,
  );
  return found === null ? null : { found, offset: offsetAtZero(found, main[0]!, companion[0]!) };
}

describe('parts', () => {
  it('A31: rate from a table of offsets', () => {
    // numpy.polyfit and normal equations give 0.0994 ppm.
    const points = [0.02, 1.01, 1.98, 3.01].map((y, i) => ({ x: 10 * i, y, sigma: 0.01 }));
    const line = fitLine(points);
    expect(line?.slope).toBeCloseTo(0.0994, 9);
    expect(line?.slopeVariance).toBeCloseTo(0.01 ** 2 / 500, 12);
    expect(fitLine([points[0]!, points[0]!])).toBeNull();
  });

  it('all differences are binned as by trying every pair', () => {
    const random = createRandom(4);
    const clicks = (n: number) => Float64Array.from({ length: n }, () => random.below(1000)).sort();
    const [a, b] = [clicks(120), clicks(90)];
    const counts = new Float64Array(40);
    for (const x of a) {
      for (const y of b) {
        const bin = Math.floor((x - y + 60) / 3);
        if (bin >= 0 && bin < 40) counts[bin]! += 1;
      }
    }
    expect(binDifferences(a, b, -60, 3, 40).counts).toEqual(counts);
    expect(binDifferences(a, new Float64Array(0), -60, 3, 4).counts).toEqual(new Float64Array(4));
  });

  it('A24: pairs stand out of a coarse correlation as the law says', () => {
    // z = C T / sqrt(R1 R2 b T), lowered by the spread over two to three bins and by 1 + R b.
    const { main, companion } = simulateClocks({ ...truth, drift: 0, offsetPs: 1e10 }, 5);
    const [fromPs, toPs] = [2e12, 4e12];
    const mainPs = main.filter((t) => t >= fromPs && t < toPs);
    const found = findCoarseMatch({ mainPs, companionPs: companion, fromPs, toPs }, quickSearches[0]!);
    if (found === null) throw new Error('expected a match');
    const law = (3e3 * 2) / Math.sqrt(2e4 * 3e4 * found.binPs * 1e-12 * 2 * (1 + 3e4 * found.binPs * 1e-12));
    expect(found.z / law).toBeGreaterThan(0.6);
    expect(found.z / law).toBeLessThan(1.05);
    expect(Math.abs(found.offsetPs - 1e10)).toBeLessThan(2 * found.binPs);
  });
});

describe('two free-running clocks', () => {
  it('are matched without bias, within their errors, over many seeds', async () => {
    const offsets = [];
    const drifts = [];
    for (let seed = 1; seed <= 12; seed += 1) {
      const result = await match(truth, seed);
      if (result === null) throw new Error(`no match for seed ${seed}`);
      offsets.push({ ...result.offset, truth: truth.offsetPs });
      drifts.push({ ...result.found.drift, truth: truth.drift });
    }
    for (const found of [offsets, drifts]) {
      const { bias, coverage } = seedStatistics(found);
      expect(Math.abs(bias)).toBeLessThan(3.5);
      // 0.68 of twelve within two and a half binomial standard deviations; the long runs narrow it down.
      expect(coverage).toBeGreaterThan(0.35);
      expect(coverage).toBeLessThan(0.97);
    }
  }, 120_000);

  it.each([
    ['a large negative drift', { drift: -9.5e-5, offsetPs: -4e10 }],
    ['a large positive drift', { drift: 8.2e-5, offsetPs: 0 }],
  ])(
    'with %s',
    async (_name, parts) => {
      const given = { ...truth, ...parts };
      const result = await match(given, 3);
      if (result === null) throw new Error('expected a match');
      expect(Math.abs(result.offset.value - given.offsetPs)).toBeLessThan(5 * result.offset.sigma);
      expect(Math.abs(result.found.drift.value - given.drift)).toBeLessThan(5 * result.found.drift.sigma);
      expect(result.found.drift.sigma).toBeLessThan(1e-11);
      expect(result.found.chi2PerDof).toBeLessThan(2);
      expect(result.found.peakSigmaPs).toBeCloseTo(Math.SQRT2 * 150, -1);
    },
    60_000,
  );

  it('in a run shorter than the range searched, whose correlation slopes', async () => {
    const given: ClockTruth = { ...truth, seconds: 0.15, rates: [4e5, 6e5], pairs: 5e4, offsetPs: -4e10 };
    const result = await match(given, 3);
    if (result === null) throw new Error('expected a match');
    expect(Math.abs(result.offset.value - given.offsetPs)).toBeLessThan(5 * result.offset.sigma);
    expect(Math.abs(result.found.drift.value - given.drift)).toBeLessThan(5 * result.found.drift.sigma);
  }, 60_000);

  it('a clock whose rate changes shows in what the line leaves', async () => {
    const result = await match({ ...truth, wanderPs: 2000 }, 6);
    if (result === null) throw new Error('expected a match');
    expect(result.found.chi2PerDof).toBeGreaterThan(5);
    expect(result.found.residualPs).toBeGreaterThan(300);
  }, 60_000);

  it('without coincidences there is no number', async () => {
    for (const seed of [1, 2, 3]) expect(await match({ ...truth, pairs: 0 }, seed)).toBeNull();
  }, 60_000);

  it('without overlap or without clicks there is no number', async () => {
    const empty: ClockFile = { spanPs: 0, read: async () => new Float64Array(0) };
    expect(await matchClocks(empty, empty, [0], quickSearches)).toBeNull();
    const { main, companion } = simulateClocks(truth, 1);
    expect(await matchClocks(clockFile(main), clockFile(companion), [1e14], quickSearches)).toBeNull();
  });
});
