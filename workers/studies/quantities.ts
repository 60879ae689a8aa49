import type { Quantity } from '../../shared/contracts/output';
import type { Estimate } from '../../shared/physics/estimate';
import { spreadOver } from './resample-slices';

/** Above this the bootstrap error is reported in place of the Poisson one. */
const EXCESS = 1.5;

export interface Measured {
  id: string;
  estimate: Estimate | null;
  unit: string;
  n: number;
  /** What was counted and how, to follow the word on the error. */
  method: string;
  /** How its counting error was got, when not by propagating Poisson counts. */
  error?: string;
  /** The same number from the totals of a resample; without it the counting error stands alone. */
  statistic?: (totals: readonly number[]) => number | null;
}

export interface QuantityList {
  quantities: Record<string, Quantity>;
  /** Ids whose bootstrap error is more than 1.5 times the counting error, with the ratio. */
  excess: { id: string; ratio: number }[];
}

/**
 * Quantities with Poisson errors propagated to first order, or with the block-bootstrap error where that is more than
 * 1.5 times as large: then something varies that counting alone does not explain. What could not be found is left out.
 */
export function listQuantities(
  measured: readonly Measured[],
  draws: readonly (readonly number[])[] | null,
  slices: number,
): QuantityList {
  const list: QuantityList = { quantities: {}, excess: [] };
  for (const { id, estimate, unit, n, method, error, statistic } of measured) {
    if (estimate === null || !Number.isFinite(estimate.value) || !Number.isFinite(estimate.sigma)) continue;
    const spread = draws === null || statistic === undefined ? null : spreadOver(draws, statistic);
    const ratio = spread === null || estimate.sigma === 0 ? 0 : spread / estimate.sigma;
    const bootstrapped = spread !== null && ratio > EXCESS;
    if (bootstrapped) list.excess.push({ id, ratio });
    list.quantities[id] = {
      value: estimate.value,
      sigma: bootstrapped ? spread : estimate.sigma,
      unit,
      method: bootstrapped
        ? `${method}; block bootstrap, ${slices} slices of time`
        : `${method}; ${error ?? 'Poisson counts, propagated'}`,
      n,
    };
  }
  return list;
}

/** A setting or an exact count: no uncertainty. */
export function settingQuantity(value: number, unit: string, method: string, n: number): Quantity {
  return { value, sigma: null, unit, method, n };
}
