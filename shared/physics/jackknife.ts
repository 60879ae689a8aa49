/**
 * Delete-one-block jackknife standard error, SE^2 = ((n-1)/n) sum (T_(i) - mean T)^2 (Efron & Tibshirani, An
 * Introduction to the Bootstrap, 1993, from memory). For smooth estimators (variances, ratios), not medians or maxima.
 * `estimate` gets the blocks without one. NaN for fewer than two blocks.
 */
export function jackknifeSigma<T>(blocks: readonly T[], estimate: (kept: readonly T[]) => number): number {
  const n = blocks.length;
  if (n < 2) return Number.NaN;
  const values = blocks.map((_, i) => estimate(blocks.filter((__, j) => j !== i)));
  const mean = values.reduce((sum, v) => sum + v, 0) / n;
  const squares = values.reduce((sum, v) => sum + (v - mean) ** 2, 0);
  return Math.sqrt(((n - 1) / n) * squares);
}
