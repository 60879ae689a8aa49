/** A number with its standard error, before it gets a unit and a name. */
export interface Estimate {
  value: number;
  sigma: number;
}

/**
 * Variance of a Poisson count as read from the count itself, N; none seen still leaves the error of one count, because
 * a rate of up to about one would have been missed.
 */
export function countVariance(counts: number): number {
  return Math.max(1, counts);
}

/**
 * First-order propagation for a function of independent counts: sigma^2 = sum (df/dx_i)^2 var_i, derivatives by central
 * differences of a thousandth of a standard deviation.
 */
export function propagate(
  f: (x: readonly number[]) => number,
  x: readonly number[],
  variances: readonly number[],
): Estimate {
  let variance = 0;
  for (let i = 0; i < x.length; i++) {
    if (!(variances[i]! > 0)) continue;
    const h = 1e-3 * Math.sqrt(variances[i]!);
    const up = f(x.map((v, j) => (j === i ? v + h : v)));
    const down = f(x.map((v, j) => (j === i ? v - h : v)));
    variance += ((up - down) / (2 * h)) ** 2 * variances[i]!;
  }
  return { value: f(x), sigma: Math.sqrt(variance) };
}
