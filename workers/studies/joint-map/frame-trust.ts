import { amplitudeSigma, blockSigma, type FramePeak } from '../../../shared/physics/fit-frames';
import type { BlockSpread, CommonLight } from '../../../shared/physics/frame-blocks';
import type { FrameMap } from '../../../shared/physics/frame-maps';

/** More of the peak than this on bins that had to be left out, and its width would be invented. */
export const MOST_HIDDEN = 0.7;
/** Least peak height over its error. */
export const LEAST_SNR = 5;

/** Least square distance of blocks over that of counting noise: below, frames come again. */
export const LEAST_SPREAD = 0.6;

/** Blocks that are too much alike tell no error. */
export function isRepeated(spread: BlockSpread | null): boolean {
  return spread !== null && spread.ratio + 4 * spread.sigma < LEAST_SPREAD;
}

/** Standard deviations to the nearest edge of the map below which a peak cannot be told from its pedestal. */
export const LEAST_ROOM = 2;

/** From the centre of a peak to the nearest edge of its map, in standard deviations. */
export function roomOf(peak: FramePeak, map: FrameMap): number {
  const cx = peak.mx + (peak.kind === 'minus' ? map.width - 1 : 0);
  const cy = peak.my + (peak.kind === 'minus' ? map.height - 1 : 0);
  return Math.min(
    Math.min(cx, map.nx - 1 - cx) / Math.sqrt(peak.xx),
    Math.min(cy, map.ny - 1 - cy) / Math.sqrt(peak.yy),
  );
}

/** Pairs alone cannot make the variance of the total more than this many times that of the pixels. */
export const MOST_COMMON = 2;

/** What all pixels have in common is more than pairs can give them: it lies under the peak, as broad as the light. */
export function isFlickering(common: CommonLight | null): boolean {
  return common !== null && common.ratio > MOST_COMMON + 4 * common.sigma;
}

/** Whether the peak's width may be quoted. */
export function isTrusted(peak: FramePeak | null): peak is FramePeak {
  return (
    peak?.fit.settled === true &&
    // Then the data would have it narrower still.
    !peak.fit.atFloor &&
    !peak.uncovered &&
    peak.hidden < MOST_HIDDEN &&
    // A wide peak takes its amplitude from the narrow one; then its width has to be known.
    peak.fit.amplitude / amplitudeSigma(peak) >= LEAST_SNR &&
    blockSigma(peak.influence, 3) < 0.3 * peak.xx &&
    blockSigma(peak.influence, 5) < 0.3 * peak.yy
  );
}
