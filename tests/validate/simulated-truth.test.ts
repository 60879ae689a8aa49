import { describe, expect, it } from 'vitest';
import { criterion, findPairTruths, pairStatistics } from '../physics/simulated-pairs';

const SEEDS = 200;

describe(`witness and joint maps over ${SEEDS} simulated runs of each plane`, () => {
  const found = findPairTruths(1001, SEEDS);

  it.each([...found.keys()])('find %s without bias, and the interval covers it', (name) => {
    const list = found.get(name) ?? [];
    const { bias, coverage } = pairStatistics(list);
    const mean = list.reduce((sum, { value }) => sum + value, 0) / list.length;
    const truth = list.reduce((sum, one) => sum + one.truth, 0) / list.length;
    console.log(
      `${name}: truth ${truth.toPrecision(6)}, mean ${mean.toPrecision(6)}, bias ${bias.toFixed(2)} SE, coverage ${(100 * coverage).toFixed(1)} %, n ${list.length}`,
    );
    expect(Math.abs(bias), `bias ${bias.toFixed(2)} standard errors`).toBeLessThan(criterion.bias);
    expect(coverage).toBeGreaterThanOrEqual(criterion.coverage[0]);
    expect(coverage).toBeLessThanOrEqual(criterion.coverage[1]);
  });
});
