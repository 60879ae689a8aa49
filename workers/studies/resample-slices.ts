import { LEAST_FINITE } from '../../shared/physics/bootstrap';
import { createRandom } from '../../shared/util/random';

/** Fewer blocks than this give no honest bootstrap error. */
export const LEAST_BLOCKS = 20;

/** Counts per slice of time, one column per kind of count; all of the same length. */
export type SliceColumns = readonly Float64Array[];

/**
 * Totals of every column over slices drawn anew with replacement; null with fewer than 20 slices. Block bootstrap:
 * Efron & Tibshirani, An Introduction to the Bootstrap (1993), from memory. It catches drift and flicker slower than a
 * slice that Poisson errors miss.
 */
export function resampleSlices(columns: SliceColumns, resamples: number, seed: number): number[][] | null {
  const slices = columns[0]?.length ?? 0;
  if (slices < LEAST_BLOCKS) return null;
  const random = createRandom(seed);
  const draws: number[][] = [];
  for (let n = 0; n < resamples; n++) {
    const totals = columns.map(() => 0);
    for (let k = 0; k < slices; k++) {
      const slice = random.below(slices);
      for (let c = 0; c < columns.length; c++) totals[c]! += columns[c]![slice]!;
    }
    draws.push(totals);
  }
  return draws;
}

/** Standard deviation of a statistic over the draws; null when it is undefined in more than one draw in fifty. */
export function spreadOver(
  draws: readonly (readonly number[])[],
  statistic: (totals: readonly number[]) => number | null,
): number | null {
  const values = draws
    .map(statistic)
    .filter((value): value is number => value !== null && Number.isFinite(value));
  if (values.length < 2 || values.length < LEAST_FINITE * draws.length) return null;
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  return Math.sqrt(values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (values.length - 1));
}
