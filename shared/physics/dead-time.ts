/**
 * True rate of a counter that is blind for `deadS` after every count, n = m/(1 - m t_d). Knoll, Radiation Detection and
 * Measurement, from memory, derived again. For steady Poisson light. Null above what such a counter can report.
 */
export function trueRateNonParalysable(measured: number, deadS: number): number | null {
  const live = 1 - measured * deadS;
  return live > 0 ? measured / live : null;
}
