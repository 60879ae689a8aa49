/**
 * Dead time and afterpulsing of one counter. Laws: Knoll, Radiation Detection and Measurement, from memory, derived
 * again. They hold for steady Poisson light; pulsed or bunched light needs simulation.
 */
export function trueRateNonParalysable(measured: number, deadS: number): number | null {
  const live = 1 - measured * deadS;
  return live > 0 ? measured / live : null;
}

/** Largest rate a paralysable counter can report, 1/(e t_d). */
export function largestParalysableRate(deadS: number): number {
  return 1 / (Math.E * deadS);
}

/**
 * m = n exp(-n t_d) solved for the lower of its two roots, n t_d < 1, by Newton's method from below. Null when the
 * measured rate is above what such a counter can report.
 */
export function trueRateParalysable(measured: number, deadS: number): number | null {
  const target = measured * deadS;
  if (!(target <= 1 / Math.E)) return null;
  // y exp(-y) is concave and rising on [0, 1), so steps from below never overshoot.
  let y = target;
  for (let n = 0; n < 200; n++) {
    const step = (target - y * Math.exp(-y)) / (Math.exp(-y) * Math.max(1e-9, 1 - y));
    y = Math.min(1, y + step);
    if (Math.abs(step) < 1e-15) break;
  }
  return y / deadS;
}

/** Observed over primary counts when each count starts an afterpulse with probability p: 1/(1-p), p < 1. */
export function afterpulseGain(probability: number): number {
  return 1 / (1 - probability);
}

/** Afterpulse probability from a channel's own delay histogram: counts above its flat base, per count. */
export function afterpulseProbability(inRange: number, base: number, counts: number): number {
  return (inRange - base) / counts;
}
