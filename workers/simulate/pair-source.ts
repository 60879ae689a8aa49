import type { Optics, PairSource } from '../../shared/contracts/scenario';
import { crystalDeltaUm } from '../../shared/physics/double-gaussian';
import type { Random } from '../../shared/util/random';

/**
 * Double-Gaussian pairs, one transverse axis: |psi|^2 ~ exp[-(x1-x2)^2/(2 d^2)] exp[-(x1+x2)^2/(2 w^2)], w the pump's
 * 1/e^2 intensity radius, d = sqrt(alpha L lambda_p / (2 pi n_p)). Then sigma(x1-x2) = d, sigma((x1+x2)/2) = w/2,
 * sigma(k1+k2) = 1/w, sigma(k1-k2) = 1/d (Law & Eberly, PRL 92, 127903 (2004); Fedorov et al., PRA 69, 052117 (2004);
 * Schneeloch & Howell, J. Opt. 18, 053501 (2016) for alpha).
 */
export interface PairLaw {
  /** sigma(x1 - x2) in the crystal, um. */
  birthUm: number;
  /** Pump radius, um. */
  waistUm: number;
  /** w/d. */
  ratio: number;
}

export function pairLaw(source: PairSource): PairLaw {
  const birthUm = crystalDeltaUm(source.crystalMm, source.pumpNm, source.pumpIndex, source.alpha);
  return { birthUm, waistUm: source.pumpWaistUm, ratio: source.pumpWaistUm / birthUm };
}

/**
 * Detector positions of a pair on one axis, as Gaussians: X1 = scale1 (m + h), X2 = scale2 (m - h), with m and h
 * independent normals, the mean and half the difference of the two source coordinates.
 */
export interface AxisLaw {
  sigmaMean: number;
  sigmaHalf: number;
  /** Detector um per source unit (um near; 1/um far), signal and idler. */
  scaleSignal: number;
  scaleIdler: number;
}

export function axisLaw(source: PairSource, optics: Optics): AxisLaw {
  const law = pairLaw(source);
  if (optics.kind === 'near') {
    return {
      sigmaMean: law.waistUm / 2,
      sigmaHalf: law.birthUm / 2,
      scaleSignal: optics.magnification,
      scaleIdler: optics.magnification,
    };
  }
  // X = lambda f k / (2 pi), lambda of that photon.
  const perNm = (optics.focalLengthMm * 1000) / (2 * Math.PI * 1000);
  return {
    sigmaMean: 1 / (2 * law.waistUm),
    sigmaHalf: 1 / (2 * law.birthUm),
    scaleSignal: source.signalNm * perNm,
    scaleIdler: source.idlerNm * perNm,
  };
}

/** Detector positions of a pair, um: xSignal, ySignal, xIdler, yIdler. */
export type PairPosition = [number, number, number, number];

export function drawPair(law: AxisLaw, random: Random, into: PairPosition): void {
  const meanX = law.sigmaMean * random.normal();
  const halfX = law.sigmaHalf * random.normal();
  const meanY = law.sigmaMean * random.normal();
  const halfY = law.sigmaHalf * random.normal();
  into[0] = law.scaleSignal * (meanX + halfX);
  into[1] = law.scaleSignal * (meanY + halfY);
  into[2] = law.scaleIdler * (meanX - halfX);
  into[3] = law.scaleIdler * (meanY - halfY);
}
