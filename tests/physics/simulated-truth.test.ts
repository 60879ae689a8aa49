import { describe, expect, it } from 'vitest';
import { criterion, findPairTruths, pairStatistics } from './simulated-pairs';

const SEEDS = 40;

/**
 * The products and the widths they are made of. Wide widths and moments are checked over 200 runs in tests/validate: of
 * sixteen numbers held to two standard errors, one in twenty each is outside by chance.
 */
const names = [
  'reid.net',
  'reid.raw',
  'mancini.net',
  'mancini.raw',
  'near width.minus.fit',
  'near width.conditional.fit',
  'far width.plus.fit',
  'far width.conditional.fit',
];

describe(`witness and joint maps over ${SEEDS} simulated runs of each plane`, () => {
  const found = findPairTruths(1, SEEDS);

  it.each(names)('find %s without bias, and the interval covers it', (name) => {
    const { bias, coverage } = pairStatistics(found.get(name) ?? []);
    expect(Math.abs(bias), `bias ${bias.toFixed(2)} standard errors`).toBeLessThan(criterion.bias);
    expect(coverage).toBeGreaterThanOrEqual(criterion.coverage[0]);
    expect(coverage).toBeLessThanOrEqual(criterion.coverage[1]);
  });
});
