export interface SeedStatistics {
  /** (mean - truth) over the standard error of the mean. */
  bias: number;
  /** Share of seeds whose 1-sigma interval holds the truth. */
  coverage: number;
}

/** How estimates over many seeds sit about their truths. */
export function seedStatistics(
  found: readonly { value: number; sigma: number | null; truth: number }[],
): SeedStatistics {
  const errors = found.map(({ value, truth }) => value - truth);
  const n = errors.length;
  const mean = errors.reduce((sum, e) => sum + e, 0) / n;
  const sd = Math.sqrt(errors.reduce((sum, e) => sum + (e - mean) ** 2, 0) / (n - 1));
  const covered = found.filter(({ value, sigma, truth }) => Math.abs(value - truth) <= (sigma ?? 0)).length;
  return { bias: mean / (sd / Math.sqrt(n)), coverage: covered / n };
}
