/**
 * Error function and the normal law, to about 1e-15 relative (both tails included).
 *
 * erfc is expanded in a Taylor series around the nearest of a set of nodes 1/16 apart: with g(x) = exp(-x^2) the
 * coefficients follow from g' = -2 x g. The nodes themselves, and everything past the last one, come from the continued
 * fraction and the power series of Abramowitz & Stegun, Handbook of Mathematical Functions (1964), 7.1.14 and 7.1.5.
 * NaN in, NaN out.
 */
const TWO_OVER_SQRT_PI = 2 / Math.sqrt(Math.PI);
const NODE_STEP = 1 / 16;
const LAST_NODE = 6;
const NODES = LAST_NODE / NODE_STEP + 1;
/** erfc(x) is below the smallest double from here on. */
const ERFC_ZERO = 27.3;

const nodeErfc = new Float64Array(NODES);
const nodeGauss = new Float64Array(NODES);
for (let n = 0; n < NODES; n++) {
  const x = n * NODE_STEP;
  nodeErfc[n] = x < 1 ? 1 - erfSeries(x) : erfcFraction(x, 400);
  nodeGauss[n] = Math.exp(-x * x);
}

/** (2/sqrt(pi)) * integral of exp(-t^2) from 0 to x. */
export function erf(x: number): number {
  const size = Math.abs(x);
  if (size < 0.5) return erfSeries(x);
  return x < 0 ? erfc(size) - 1 : 1 - erfc(size);
}

/** 1 - erf(x), without loss of digits for large x. */
export function erfc(x: number): number {
  if (x < 0) return 2 - erfc(-x);
  if (x < 0.25) return 1 - erfSeries(x);
  if (x < LAST_NODE) return erfcNear(x);
  if (x < ERFC_ZERO) return erfcFraction(x, 40);
  return x >= ERFC_ZERO ? 0 : Number.NaN;
}

/** Probability that a standard normal variable lies below x. */
export function normalCdf(x: number): number {
  return 0.5 * erfc(-x * Math.SQRT1_2);
}

/** Density of the standard normal law. */
export function normalPdf(x: number): number {
  return Math.exp(-0.5 * x * x) / Math.sqrt(2 * Math.PI);
}

function erfSeries(x: number): number {
  // A&S 7.1.5; alternating, so only used where the terms stay small.
  const square = x * x;
  let power = x;
  let sum = x;
  for (let n = 1; n < 40; n++) {
    power *= -square / n;
    const term = power / (2 * n + 1);
    sum += term;
    if (Math.abs(term) <= 1e-18 * Math.abs(sum)) break;
  }
  return TWO_OVER_SQRT_PI * sum;
}

function erfcFraction(x: number, depth: number): number {
  // A&S 7.1.14, from the deepest level up.
  let tail = x;
  for (let n = depth; n >= 1; n--) tail = x + n / 2 / tail;
  return Math.exp(-x * x) / (Math.sqrt(Math.PI) * tail);
}

function erfcNear(x: number): number {
  const node = Math.round(x / NODE_STEP);
  const x0 = node * NODE_STEP;
  const d = x - x0;
  // g_n: Taylor coefficients of exp(-x^2) around x0; n g_n = -2 (x0 g_(n-1) + g_(n-2)).
  let before = 0;
  let now = 1;
  let power = d;
  let sum = d;
  for (let n = 1; n < 30; n++) {
    const next = (-2 * (x0 * now + before)) / n;
    before = now;
    now = next;
    power *= d;
    const term = (now * power) / (n + 1);
    sum += term;
    if (Math.abs(power) < 1e-20) break;
  }
  return nodeErfc[node]! - TWO_OVER_SQRT_PI * nodeGauss[node]! * sum;
}
