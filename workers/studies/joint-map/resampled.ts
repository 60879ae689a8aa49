import type { Quantity } from '../../../shared/contracts/output';
import { spreadOf } from '../../../shared/physics/bootstrap';

/** A value with its bootstrap resamples, so that products and ratios carry their errors and correlations along. */
export interface Resampled {
  value: number;
  resampled: Float64Array;
  /** How value and error were got, and the counts they rest on. */
  method: string;
  n: number;
}

/** Applies a function to value and resamples of one or more quantities drawn with the same resample index. */
export function combine(
  parts: readonly Resampled[],
  method: string,
  f: (...values: number[]) => number,
): Resampled {
  const count = Math.min(...parts.map((part) => part.resampled.length));
  const resampled = new Float64Array(count);
  for (let r = 0; r < count; r += 1) resampled[r] = f(...parts.map((part) => part.resampled[r] as number));
  return {
    value: f(...parts.map((part) => part.value)),
    resampled,
    method,
    n: Math.min(...parts.map((part) => part.n)),
  };
}

/** Null where value or error is not finite: such a number is not shown. */
export function toQuantity(part: Resampled, unit: string): Quantity | null {
  const { sigma } = spreadOf(part.resampled);
  if (!Number.isFinite(part.value) || !Number.isFinite(sigma)) return null;
  return { value: part.value, sigma, unit, method: part.method, n: part.n };
}

/** Standard errors that a variance must lie above zero to have a width. */
const CLEAR_OF_ZERO = 3;

/**
 * Square root of a variance; null where the variance is not clear of zero, because a width and its first-order error
 * then say nothing.
 */
export function widthOf(variance: Resampled): Resampled | null {
  const { sigma } = spreadOf(variance.resampled);
  if (!(variance.value > CLEAR_OF_ZERO * sigma)) return null;
  return combine([variance], variance.method, (v) => (v > 0 ? Math.sqrt(v) : Number.NaN));
}

/** Adds the quantities that could be found. */
export function addQuantities(
  into: Record<string, Quantity>,
  parts: Record<string, { part: Resampled | null; unit: string }>,
): void {
  for (const [id, { part, unit }] of Object.entries(parts)) {
    const quantity = part === null ? null : toQuantity(part, unit);
    if (quantity !== null) into[id] = quantity;
  }
}
