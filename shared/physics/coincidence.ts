import { countVariance, type Estimate } from './estimate';

/**
 * Accidentals from the singles, A = R_A R_B w T = N_A N_B w / T with the full window w. Eckart & Shonka, Phys. Rev. 53,
 * 752 (1938), from memory. SE = A sqrt(1/N_A + 1/N_B + 2 C/(N_A N_B)); the last term is there because tags of the C
 * detected pairs move both counts together (0 leaves it out).
 */
export function accidentalsFromSingles(
  countsA: number,
  countsB: number,
  windowS: number,
  spanS: number,
  pairs = 0,
): Estimate {
  const value = (countsA * countsB * windowS) / spanS;
  if (countsA === 0 || countsB === 0) {
    // An arm without a tag may have missed about one; the other then pairs all of its own with it.
    return { value, sigma: (Math.max(1, countsA) * Math.max(1, countsB) * windowS) / spanS };
  }
  const relative = 1 / countsA + 1 / countsB + (2 * Math.max(0, pairs)) / (countsA * countsB);
  return { value, sigma: value * Math.sqrt(relative) };
}

/**
 * Accidentals from counts in windows that hold no pairs, together `ratio` times as wide as the prompt one: A = N/r,
 * SE = sqrt(N)/r, that of one count when there is none. Serves shifted windows (ratio = their number) and sidebands of the histogram alike.
 */
export function accidentalsFromWindows(counts: number, ratio: number): Estimate {
  return { value: counts / ratio, sigma: Math.sqrt(countVariance(counts)) / ratio };
}

/** Net coincidences N_w - A with SE sqrt(N_w + var A). */
export function netCoincidences(inWindow: number, accidentals: Estimate): Estimate {
  return {
    value: inWindow - accidentals.value,
    sigma: Math.sqrt(countVariance(inWindow) + accidentals.sigma ** 2),
  };
}

/**
 * CAR as true over accidental, (C - A)/A; the other convention in use, C/A, is larger by one. SE by the delta method
 * with A measured apart from C. Null without accidentals or without pairs: there is no ratio to give.
 */
export function coincidencesToAccidentals(inWindow: number, accidentals: Estimate): Estimate | null {
  const { value: a, sigma } = accidentals;
  if (!(a > 0) || inWindow === 0) return null;
  const variance = countVariance(inWindow) / a ** 2 + (inWindow / a ** 2) ** 2 * sigma ** 2;
  return { value: (inWindow - a) / a, sigma: Math.sqrt(variance) };
}

export interface CarModel {
  pairRate: number;
  efficiencyA: number;
  efficiencyB: number;
  darkA: number;
  darkB: number;
  windowS: number;
  /** Fraction of the peak inside the window. */
  fraction: number;
}

/** Expected CAR of a steady source: f eta_A eta_B R / (R_A R_B w); without darks f/(R w), whatever the efficiencies. */
export function expectedCar(model: CarModel): number {
  const { pairRate, efficiencyA, efficiencyB } = model;
  const singlesA = efficiencyA * pairRate + model.darkA;
  const singlesB = efficiencyB * pairRate + model.darkB;
  return (model.fraction * efficiencyA * efficiencyB * pairRate) / (singlesA * singlesB * model.windowS);
}

export interface KlyshkoRequest {
  /** Counts of the heralding arm in the same time, and how many of them are darks or background. */
  heralds: number;
  heraldDarks: number;
  inWindow: number;
  /** Accidentals in the window with the error of their own measurement. */
  accidentals: Estimate;
  /** Fraction of the peak inside the window, with its error. */
  fraction: Estimate;
}

/**
 * Heralding efficiency of the arm that is not the herald, eta = (C - A)/(f (S - D)). Klyshko, Sov. J. Quantum Electron.
 * 10, 1112 (1980), from memory. It includes optics and mode coupling, not the detector alone.
 *
 * Error: the true pairs are a subset of the heralds, so their part is binomial:
 * var(eta f) = e(1-e)/n + (A + var A)/n^2 + e^2 (D + D_ref)/n^2 with n = S - D, e = eta f, and darks measured in a run of
 * equal length (D_ref = D); the error of f is added in quadrature. Null when no heralds are left.
 */
export function heraldingEfficiency(request: KlyshkoRequest): Estimate | null {
  const { heralds, heraldDarks, inWindow, accidentals, fraction } = request;
  const n = heralds - heraldDarks;
  if (!(n > 0) || !(fraction.value > 0)) return null;
  const e = (inWindow - accidentals.value) / n;
  // Noise may push the share outside [0, 1]; the binomial part then stays at its edge.
  const share = Math.min(1, Math.max(0, e));
  const variance =
    (share * (1 - share)) / n +
    (accidentals.value + accidentals.sigma ** 2) / n ** 2 +
    (share ** 2 * 2 * heraldDarks) / n ** 2;
  const relativeFraction = fraction.sigma / fraction.value;
  const value = e / fraction.value;
  return { value, sigma: Math.sqrt(variance / fraction.value ** 2 + (value * relativeFraction) ** 2) };
}

/** Probability that an accidental photon of rate R falls into a gate of length w, 1 - exp(-R w). */
export function gateAccidental(rate: number, gateS: number): number {
  return -Math.expm1(-rate * gateS);
}
