import type { Estimate } from './estimate';

export interface ThreeFoldCounts {
  heralds: number;
  heraldAnd1: number;
  heraldAnd2: number;
  threeFold: number;
}

/** Upper 95 % Poisson limit for no count seen, -ln 0.05. */
const NONE_SEEN_LIMIT = -Math.log(0.05);

/**
 * Heralded g2(0) = N_h12 N_h/(N_h1 N_h2), all inside one window around each herald; never accidental-subtracted.
 * Grangier, Roger & Aspect, Europhys. Lett. 1, 173 (1986), from memory.
 * SE = g2 sqrt(1/N_h12 + 1/N_h1 + 1/N_h2 - 1/N_h). `upperLimit` is set when no three-fold was seen: then the value is 0
 * and the limit is that of 3.00 counts (95 %). Null when a two-fold count is missing.
 */
export function heraldedG2(counts: ThreeFoldCounts): (Estimate & { upperLimit: number | null }) | null {
  const { heralds, heraldAnd1, heraldAnd2, threeFold } = counts;
  if (!(heralds > 0 && heraldAnd1 > 0 && heraldAnd2 > 0)) return null;
  const perCount = heralds / (heraldAnd1 * heraldAnd2);
  if (threeFold === 0) {
    const upperLimit = NONE_SEEN_LIMIT * perCount;
    return { value: 0, sigma: perCount, upperLimit };
  }
  const value = threeFold * perCount;
  const relative = 1 / threeFold + 1 / heraldAnd1 + 1 / heraldAnd2 - 1 / heralds;
  return { value, sigma: value * Math.sqrt(Math.max(0, relative)), upperLimit: null };
}

/** Expected for one thermal mode with `mu` pairs per window and low efficiency: (4 mu + 6 mu^2)/(1 + 2 mu)^2. */
export function heraldedG2OneMode(mu: number): number {
  return (4 * mu + 6 * mu ** 2) / (1 + 2 * mu) ** 2;
}

/** Expected for very many modes (Poisson pairs) with low efficiency: 1 - 1/(1 + mu)^2. */
export function heraldedG2ManyModes(mu: number): number {
  return 1 - 1 / (1 + mu) ** 2;
}
