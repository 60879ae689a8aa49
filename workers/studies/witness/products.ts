import type { AxisName, AxisVariances, PlaneResult } from '../joint-map/plane-result';
import { combine, type Resampled } from '../joint-map/resampled';

/** um^2 (rad/mm)^2 to hbar^2. */
const UM_PER_MM_SQUARED = 1e-6;

export type Subtraction = 'raw' | 'net';

export interface AxisProducts {
  /** V(x1|x2) V(k1|k2): signal inferred from idler. */
  reid: Resampled | null;
  /** V(x2|x1) V(k2|k1): idler inferred from signal. */
  reidIdler: Resampled | null;
  /** Var(x1-x2) Var(k1+k2). */
  mancini: Resampled | null;
  /** A Reid factor came from a camera: bounded from above by Var(x1-x2) or Var(k1+k2). */
  bounded: boolean;
}

/**
 * Products of one axis from a near and a far acquisition. They were measured apart, so resample r of one meets resample
 * r of the other freely. Of a camera only the bound V(x1|x2) <= Var(x1-x2), V(k1|k2) <= Var(k1+k2) is known; a product
 * of bounds below 1/4 is below it all the more.
 */
export function axisProducts(
  near: PlaneResult,
  far: PlaneResult,
  axis: AxisName,
  what: Subtraction,
): AxisProducts {
  const n = near.axes[axis][what];
  const f = far.axes[axis][what];
  const bounded = what === 'net' && (near.kind === 'frames' || far.kind === 'frames');
  const inferred = (which: 'conditionalSignal' | 'conditionalIdler'): Resampled | null =>
    product(near.kind === 'frames' ? n.minus : n[which], far.kind === 'frames' ? f.plus : f[which]);
  return {
    reid: inferred('conditionalSignal'),
    reidIdler: inferred('conditionalIdler'),
    mancini: product(n.minus, f.plus),
    bounded,
  };
}

function product(near: Resampled | null, far: Resampled | null): Resampled | null {
  if (near === null || far === null) return null;
  const method = near.method === far.method ? near.method : `near: ${near.method}; far: ${far.method}`;
  return combine([near, far], method, (v, w) => (v > 0 && w > 0 ? v * w * UM_PER_MM_SQUARED : Number.NaN));
}

/** Both axes in one number on the scale of one: sqrt(Wx Wy) of states within the bound on each axis is not below it. */
export function bothAxes(x: Resampled | null, y: Resampled | null): Resampled | null {
  if (x === null || y === null) return null;
  return combine([x, y], `geometric mean of x and y; ${x.method}`, (a, b) => Math.sqrt(a * b));
}

/**
 * K = 1/(2 sqrt W) of a pure double-Gaussian state with Reid product W. A camera has only a bound W' >= W, the Mancini
 * product, and so a lower bound of K.
 */
export function schmidtOf(reid: Resampled | null, bounded: boolean): Resampled | null {
  if (reid === null) return null;
  const what = bounded
    ? 'lower bound 1/(2 sqrt W) with the Mancini product W, which is not below the Reid product'
    : '1/(2 sqrt W) with the Reid product W';
  return combine(
    [reid],
    `${what}, accidentals subtracted, for pure double-Gaussian states only; ${reid.method}`,
    (w) => 1 / (2 * Math.sqrt(w)),
  );
}

/** Fedorov ratio sigma(x1)/sigma(x1|x2) in the near field. */
export function fedorovOf(near: AxisVariances): Resampled | null {
  if (near.signal === null || near.conditionalSignal === null) return null;
  return combine([near.signal, near.conditionalSignal], near.signal.method, (v, c) =>
    v > 0 && c > 0 ? Math.sqrt(v / c) : Number.NaN,
  );
}
