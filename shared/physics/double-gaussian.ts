/**
 * Double-Gaussian biphoton, one transverse axis, hbar = 1:
 * psi ~ exp[-(x1-x2)^2/(4 d^2)] exp[-((x1+x2)/2)^2/w^2], w the pump's 1/e^2 intensity radius in the crystal and
 * d = sigma(x1-x2). Law & Eberly, PRL 92, 127903 (2004); Fedorov et al., PRA 69, 052117 (2004); Chan, Torres & Eberly,
 * PRA 75, 050101 (2007), all from memory. Symmetric under r -> 1/r with r = w/d.
 */
export interface DoubleGaussian {
  /** Pump waist w, um. */
  waistUm: number;
  /** d = sigma(x1 - x2), um. */
  deltaUm: number;
}

/** Standard deviations in um (near) and rad/mm (far), without any detector. */
export interface DoubleGaussianWidths {
  xMinusUm: number;
  xPlusUm: number;
  xSingleUm: number;
  xConditionalUm: number;
  kMinusPerMm: number;
  kPlusPerMm: number;
  kSinglePerMm: number;
  kConditionalPerMm: number;
}

const PER_UM_TO_PER_MM = 1e3;

export function doubleGaussianWidths({ waistUm: w, deltaUm: d }: DoubleGaussian): DoubleGaussianWidths {
  return {
    xMinusUm: d,
    // |psi|^2 in x_+ = x1 + x2 is exp(-x_+^2/(2 w^2)).
    xPlusUm: w,
    xSingleUm: Math.hypot(w, d) / 2,
    xConditionalUm: 1 / Math.hypot(1 / d, 1 / w),
    kMinusPerMm: PER_UM_TO_PER_MM / d,
    kPlusPerMm: PER_UM_TO_PER_MM / w,
    kSinglePerMm: (PER_UM_TO_PER_MM * Math.hypot(1 / w, 1 / d)) / 2,
    kConditionalPerMm: PER_UM_TO_PER_MM / Math.hypot(w, d),
  };
}

/** Reid product V(x1|x2) V(k1|k2) = r^2/(1+r^2)^2 = 1/(4 K^2). */
export function reidProduct(r: number): number {
  return (r * r) / (1 + r * r) ** 2;
}

/** Mancini product Var(x1-x2) Var(k1+k2) = 1/r^2. */
export function manciniProduct(r: number): number {
  return 1 / (r * r);
}

/** Schmidt number of one axis, (r + 1/r)/2; also the Fedorov ratio sigma(x1)/sigma(x1|x2). */
export function schmidtNumber(r: number): number {
  return (r + 1 / r) / 2;
}

/**
 * Gaussian stand-ins of sinc(b q^2) ~ exp(-alpha b q^2): a model choice that spreads d by a factor 2.7.
 * `amplitude`: equal 1/e amplitude (Chan, Torres & Eberly 2007, quoted 0.455, from memory); `fwhm`: equal FWHM of the
 * intensity; `momentum`: equal 1-D momentum variance; `position`: equal 1-D position variance (behind Schneeloch &
 * Howell, J. Opt. 18, 053501 (2016), from memory); `overlap`: largest 2-D overlap.
 */
export const sincAlpha = {
  amplitude: 0.4547267104391095,
  fwhm: 0.2490544735679113,
  momentum: 1 / 3,
  position: 9 / 5,
  overlap: 0.7185223270793366,
} as const;

/** d = sqrt(alpha L lambda_p / (2 pi n_p)) in um. L mm, lambda_p nm (vacuum), n_p the pump's index. */
export function crystalDeltaUm(lengthMm: number, pumpNm: number, pumpIndex: number, alpha: number): number {
  return Math.sqrt((alpha * lengthMm * 1e3 * pumpNm * 1e-3) / (2 * Math.PI * pumpIndex));
}

/** Covariance of one arm pair in one plane, crystal units squared. */
export interface PairCovariance {
  v1: number;
  v2: number;
  c: number;
}

/** Near field: um^2, C > 0. */
export function nearCovariance({ waistUm: w, deltaUm: d }: DoubleGaussian): PairCovariance {
  return { v1: (w * w + d * d) / 4, v2: (w * w + d * d) / 4, c: (w * w - d * d) / 4 };
}

/** Far field: (rad/mm)^2, C < 0 for r > 1. */
export function farCovariance({ waistUm: w, deltaUm: d }: DoubleGaussian): PairCovariance {
  const plus = 1e6 / (w * w);
  const minus = 1e6 / (d * d);
  return { v1: (plus + minus) / 4, v2: (plus + minus) / 4, c: (plus - minus) / 4 };
}

/**
 * What pixels make of it: a^2/12 on each coordinate, nothing on the covariance (pixels wider than about twice the
 * narrow width break this). Pitches in crystal units: pitch / M, or farFieldK(pitch).
 */
export function pixelBlurred(truth: PairCovariance, pitch1: number, pitch2: number): PairCovariance {
  return { v1: truth.v1 + pitch1 ** 2 / 12, v2: truth.v2 + pitch2 ** 2 / 12, c: truth.c };
}

/** Var(x1-x2), Var(x1+x2) and both conditional variances of a Gaussian law. */
export interface PairVariances {
  minus: number;
  plus: number;
  /** V(x1|x2) = V1 - C^2/V2. */
  conditional1: number;
  /** V(x2|x1) = V2 - C^2/V1. */
  conditional2: number;
}

export function pairVariances({ v1, v2, c }: PairCovariance): PairVariances {
  return {
    minus: v1 + v2 - 2 * c,
    plus: v1 + v2 + 2 * c,
    conditional1: v1 - (c * c) / v2,
    conditional2: v2 - (c * c) / v1,
  };
}
