import type { Spread } from './bootstrap';

/**
 * Variance witnesses per transverse axis, hbar = 1. A witness and its bound are one object: a product is never compared
 * with the bound of another inequality.
 * Reid: M. D. Reid, PRA 40, 913 (1989); Mancini: Mancini et al., PRL 88, 120401 (2002); rotated and Duan: Duan et al.,
 * PRL 84, 2722 and Simon, PRL 84, 2726 (2000), all from memory.
 */
export interface Witness {
  id: 'reid' | 'mancini' | 'rotated' | 'duan';
  label: string;
  bound: number;
  /** What a value below the bound shows. */
  shows: string;
}

export const witnesses = {
  reid: { id: 'reid', label: 'Reid product', bound: 1 / 4, shows: 'EPR steering' },
  mancini: { id: 'mancini', label: 'Mancini product', bound: 1, shows: 'entanglement' },
  rotated: { id: 'rotated', label: 'rotated product', bound: 1 / 4, shows: 'entanglement' },
  duan: { id: 'duan', label: 'Duan sum', bound: 2, shows: 'entanglement' },
} as const satisfies Record<string, Witness>;

/** Duan sum at its best unit scale s^2 = sqrt(Var x_- / Var k_+): 2 sqrt(product). */
export function duanSum(varMinus: number, varPlus: number): number {
  return 2 * Math.sqrt(varMinus * varPlus);
}

export interface Significance {
  /** ln(bound/W)/(SE/W): never above the linear one, so it is the one to headline. */
  log: number;
  /** (bound - W)/SE. */
  linear: number;
}

export function significanceOf(value: number, sigma: number, bound: number): Significance {
  return { log: Math.log(bound / value) / (sigma / value), linear: (bound - value) / sigma };
}

export type VerdictLevel = 'violated' | 'indicated' | 'inconclusive' | 'not-violated';

/**
 * violated: at least 5 sigma on the log scale and the 95 % interval below the bound; indicated: at least 3 sigma;
 * not-violated: the whole interval above the bound; otherwise inconclusive.
 */
export function verdictLevel(z: number, interval: readonly [number, number], bound: number): VerdictLevel {
  const below = interval[1] < bound;
  if (z >= 5 && below) return 'violated';
  if (z >= 3) return 'indicated';
  return interval[0] > bound ? 'not-violated' : 'inconclusive';
}

export interface VerdictRequest {
  witness: Witness;
  /** E.g. `x`, `y`, `x and y (geometric mean)`. */
  axis: string;
  value: number;
  spread: Spread;
  resampled: Float64Array;
  /** Relative 1-sigma error that all resamples share (calibration). */
  systematic: number;
  /** Why the value supports no claim, as a clause; null where it does. */
  doubts: string | null;
  /** Sentences with the assumptions, from the study. */
  assumptions: string;
}

/** Fits the contract of a verdict. */
export interface Judgement {
  bound: number;
  side: 'below';
  significance: number;
  significanceLinear: number;
  interval: [number, number];
  level: VerdictLevel;
  sentence: string;
}

/** Whether twice the systematic error would take a value below the bound up to it. */
export function isShaken(value: number, systematic: number, bound: number): boolean {
  return value < bound && value * (1 + 2 * systematic) >= bound;
}

/**
 * A resample without a finite value counts as reaching the bound. A violation that twice the systematic error would
 * undo is only indicated, and doubts leave no claim at all, whatever the value.
 */
export function judge(request: VerdictRequest): Judgement {
  const { witness, axis, value, spread, resampled, systematic, doubts, assumptions } = request;
  const { bound } = witness;
  const z = significanceOf(value, spread.sigma, bound);
  const counted = verdictLevel(z.log, spread.interval, bound);
  const shaken = counted === 'violated' && isShaken(value, systematic, bound);
  const level = doubts !== null ? 'inconclusive' : shaken ? 'indicated' : counted;
  const above = resampled.reduce((count, v) => count + (v < bound ? 0 : 1), 0);
  const share =
    above === 0
      ? `none of ${resampled.length} resamples reaches it`
      : `${above} of ${resampled.length} resamples reach it`;
  const sentence =
    doubts === null
      ? `${headline(level, witness, axis, Math.abs(z.log), shaken ? systematic : null)} (${share}). ${assumptions}`
      : `No verdict on the ${witness.label} in ${axis}: ${doubts}.`;
  return {
    bound,
    side: 'below',
    significance: z.log,
    significanceLinear: z.linear,
    interval: spread.interval,
    level,
    sentence: sentence.trim(),
  };
}

function headline(
  level: VerdictLevel,
  witness: Witness,
  axis: string,
  z: number,
  /** Set where the calibration is what keeps an indication from being more. */
  shaking: number | null,
): string {
  const name = `The ${witness.label} in ${axis}`;
  const bound = `the bound ${witness.bound}`;
  switch (level) {
    case 'violated':
      return `${name} lies ${z.toFixed(1)} standard deviations below ${bound}: this shows ${witness.shows}`;
    case 'indicated':
      return `${name} lies ${z.toFixed(1)} standard deviations below ${bound}: this indicates ${witness.shows}, ${
        shaking === null
          ? 'short of five'
          : `no more, because twice the calibration error of ${(100 * shaking).toFixed(1)} % would take it to the bound`
      }`;
    case 'not-violated':
      return `${name} lies above ${bound} by ${z.toFixed(1)} standard deviations: no ${witness.shows} is shown`;
    case 'inconclusive':
      return `${name} and ${bound} cannot be told apart with confidence (${z.toFixed(1)} standard deviations)`;
  }
}
