interface Calibrated {
  value: number;
  /** 1-sigma. */
  sigma: number;
}

/** The plane's calibration: image over object size; effective focal length in mm and vacuum wavelengths in nm. */
export type PlaneCalibration =
  | { kind: 'near'; magnification: Calibrated }
  | { kind: 'far'; focalLengthMm: Calibrated; signalNm: Calibrated; idlerNm: Calibrated };

/**
 * Detector pixels to crystal units. Near field x = X / M in um; far field k = 2 pi X / (lambda f) in rad/mm with the
 * vacuum wavelength of that photon and the effective focal length of the whole train (Goodman, Introduction to Fourier
 * Optics, from memory). The sign of M is left out: variances do not depend on it.
 */
export interface PlaneScale {
  /** Unit of one axis: `um` or `rad/mm`. */
  unit: 'um' | 'rad/mm';
  symbol: 'x' | 'k';
  /** Crystal units per detector um, per arm. */
  signal: number;
  idler: number;
  /** Relative 1-sigma error common to both arms (systematic: it does not average down). */
  relative: number;
}

/** k in rad/mm of a far-field position in um; lambda in nm, f in mm. */
export function farFieldK(positionUm: number, wavelengthNm: number, focalLengthMm: number): number {
  return (2 * Math.PI * positionUm * 1e3) / (wavelengthNm * focalLengthMm);
}

export function planeScale(plane: PlaneCalibration): PlaneScale {
  if (plane.kind === 'near') {
    const { value, sigma } = plane.magnification;
    return { unit: 'um', symbol: 'x', signal: 1 / value, idler: 1 / value, relative: sigma / value };
  }
  const { focalLengthMm: f, signalNm, idlerNm } = plane;
  // Both wavelengths enter one sum coordinate; their relative errors are averaged in quadrature with half weight each.
  const wavelength = Math.hypot(signalNm.sigma / signalNm.value, idlerNm.sigma / idlerNm.value) / 2;
  return {
    unit: 'rad/mm',
    symbol: 'k',
    signal: farFieldK(1, signalNm.value, f.value),
    idler: farFieldK(1, idlerNm.value, f.value),
    relative: Math.hypot(f.sigma / f.value, wavelength),
  };
}

/** Relative error of sx^2 sk^2 from relative errors of sx, sk and the calibrations: 2 sqrt(sum of squares). */
export function productRelativeError(relatives: readonly number[]): number {
  return 2 * Math.hypot(...relatives);
}

/** Variance that one square pixel of side a adds to a coordinate (uniform law). */
export function pixelVariance(pitch: number): number {
  return (pitch * pitch) / 12;
}

/**
 * Width with the pixels of both coordinates taken out, s_true = sqrt(s_m^2 - a^2/6). Null where s_m^2 < 1.5 a^2/6:
 * then only an upper limit can be given. Never for a headline witness.
 */
export function deconvolvedDifferenceSigma(measured: number, pitch: number): number | null {
  const blur = 2 * pixelVariance(pitch);
  return measured * measured < 1.5 * blur ? null : Math.sqrt(measured * measured - blur);
}
