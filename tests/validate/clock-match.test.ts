import { describe, expect, it } from 'vitest';
import { matchClocks, offsetAtZero } from '../../shared/physics/clock-match';
import { clockFile, quickSearches, simulateClocks } from '../physics/simulated-clocks';
import { seedStatistics } from '../support/seed-statistics';

describe('two free-running clocks over many seeds', () => {
  it('offset and drift are unbiased and covered', async () => {
    const truth = {
      seconds: 6,
      rates: [2e4, 3e4],
      pairs: 3e3,
      offsetPs: 2.1e10,
      drift: 4e-6,
      jitterPs: 150,
    } as const;
    const offsets = [];
    const drifts = [];
    for (let seed = 101; seed <= 220; seed += 1) {
      const { main, companion } = simulateClocks(truth, seed);
      const guess = companion[0]! - main[0]!;
      const found = await matchClocks(clockFile(main), clockFile(companion), [guess], quickSearches);
      if (found === null) throw new Error(`no match for seed ${seed}`);
      offsets.push({ ...offsetAtZero(found, main[0]!, companion[0]!), truth: truth.offsetPs });
      drifts.push({ ...found.drift, truth: truth.drift });
    }
    for (const found of [offsets, drifts]) {
      const { bias, coverage } = seedStatistics(found);
      expect(Math.abs(bias)).toBeLessThan(3.5);
      expect(coverage).toBeGreaterThan(0.55);
      expect(coverage).toBeLessThan(0.82);
    }
  }, 900_000);
});
