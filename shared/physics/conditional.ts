/**
 * Conditional (inferred) variance from a joint map [x2][x1] of counts: V(x1|x2) = sum_x2 P(x2) Var(x1|x2), columns of
 * fixed x2 (Reid, PRA 40, 913 (1989), from memory). The divisor n - 1 keeps sparse columns from feigning a violation.
 * Only for raw counts: maps with negative entries are fitted instead.
 */
export interface ConditionalVariance {
  /** pixel^2; NaN when no column is kept. */
  value: number;
  /** Fraction of the counts in columns that were skipped. */
  discarded: number;
  kept: Uint8Array;
}

/** Sums (n, sum x, sum x^2) of every column; 3 * columns. `over` is the inferred coordinate. */
export function columnSums(
  map: Float64Array,
  offset: number,
  n1: number,
  n2: number,
  over: 'x1' | 'x2',
): Float64Array {
  const columns = over === 'x1' ? n2 : n1;
  const out = new Float64Array(3 * columns);
  for (let x2 = 0; x2 < n2; x2 += 1) {
    for (let x1 = 0; x1 < n1; x1 += 1) {
      const count = map[offset + x2 * n1 + x1] as number;
      if (count === 0) continue;
      const at = 3 * (over === 'x1' ? x2 : x1);
      const x = over === 'x1' ? x1 : x2;
      out[at] = (out[at] as number) + count;
      out[at + 1] = (out[at + 1] as number) + count * x;
      out[at + 2] = (out[at + 2] as number) + count * x * x;
    }
  }
  return out;
}

export const LEAST_COLUMN_COUNTS = 5;

/** Columns with fewer than `least` counts are skipped and their share reported. */
export function conditionalVariance(
  sums: Float64Array,
  divisor: 'n' | 'n-1' = 'n-1',
  least = LEAST_COLUMN_COUNTS,
): ConditionalVariance {
  const columns = sums.length / 3;
  const kept = new Uint8Array(columns);
  let total = 0;
  let inside = 0;
  for (let k = 0; k < columns; k += 1) {
    const n = sums[3 * k] as number;
    total += n;
    if (n < least) continue;
    kept[k] = 1;
    inside += n;
  }
  const value = weightedVariance(sums, 0, kept, divisor);
  return { value, discarded: total > 0 ? 1 - inside / total : 1, kept };
}

/** Count-weighted mean of column variances over the kept columns; columns below 2 counts add nothing. */
export function weightedVariance(
  sums: Float64Array,
  offset: number,
  kept: Uint8Array,
  divisor: 'n' | 'n-1',
): number {
  let weight = 0;
  let value = 0;
  for (let k = 0; k < kept.length; k += 1) {
    const n = sums[offset + 3 * k] as number;
    if (kept[k] === 0 || n < 2) continue;
    const s1 = sums[offset + 3 * k + 1] as number;
    const squares = (sums[offset + 3 * k + 2] as number) - (s1 * s1) / n;
    value += n * (squares / (divisor === 'n' ? n : n - 1));
    weight += n;
  }
  return weight > 0 ? value / weight : Number.NaN;
}
