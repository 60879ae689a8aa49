import { amplitudeSigma, blockSigma, type FramePeak } from '../../../shared/physics/fit-frames';

/** More of the peak than this on bins that had to be left out, and its width would be invented. */
export const MOST_HIDDEN = 0.7;
/** Least peak height over its error. */
export const LEAST_SNR = 5;

/** Whether the peak's width may be quoted. */
export function isTrusted(peak: FramePeak | null): peak is FramePeak {
  return (
    peak?.fit.converged === true &&
    !peak.uncovered &&
    peak.hidden < MOST_HIDDEN &&
    // A wide peak takes its amplitude from the narrow one; then its width has to be known.
    peak.fit.amplitude / amplitudeSigma(peak) >= LEAST_SNR &&
    blockSigma(peak.influence, 3) < 0.3 * peak.xx &&
    blockSigma(peak.influence, 5) < 0.3 * peak.yy
  );
}
