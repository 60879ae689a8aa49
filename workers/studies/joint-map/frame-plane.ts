import type { FrameTally } from '../../../shared/contracts/tally';
import { Problem } from '../../../shared/errors/problem';
import { type BlockWeights, drawBlockWeights, resampleSums } from '../../../shared/physics/bootstrap';
import { planeScale } from '../../../shared/physics/calibration';
import { type FramePeak, fitFramePeaks } from '../../../shared/physics/fit-frames';
import { totalInfluence } from '../../../shared/physics/fit-pair';
import { FIT_PARAMETERS } from '../../../shared/physics/fit-shape';
import { blockSpread, commonLight } from '../../../shared/physics/frame-blocks';
import { buildFrameMaps, type FrameMapKind, type SelfMaps } from '../../../shared/physics/frame-maps';
import { FrameSpectra } from '../../kernels/frame-spectra';
import type { CountedInput } from '../study';
import { treatmentWords } from './frame-dials';
import { checkFramePlane } from './frame-plane-checks';
import { framePlaneMaps } from './frame-plane-maps';
import { isFlickering, isRepeated, isTrusted, LEAST_ROOM, roomOf } from './frame-trust';
import {
  type AxisResult,
  LEAST_BLOCKS,
  noVariances,
  type PlaneRequest,
  type PlaneResult,
} from './plane-result';
import type { Resampled } from './resampled';

/**
 * Camera frames see only net covariances: accidentals cancel in the estimator, so there is no raw column, and the
 * conditional variance is bounded from above by that of the difference (sum), V(x1|x2) <= Var(x1 -+ x2).
 */
export function analyseFramePlane(
  input: CountedInput & { tally: FrameTally },
  request: PlaneRequest,
): PlaneResult {
  const { tally, plane, detector } = input;
  if (plane === null) throw new Problem('bad-plane', 'The acquisition has no plane; say near or far field.');
  if (detector.kind !== 'frames') {
    throw new Problem('bad-detector', 'Frames need a detector map of a camera; this one is of channels.');
  }
  const scale = planeScale(plane);
  const pixel = (detector.pitchUm * (scale.signal + scale.idler)) / 2;
  const { crosstalk, perPair, treatment } = request.frames;
  const maps = buildFrameMaps(tally, selfMapsOf(tally), crosstalk, treatment.normalised ? 'light' : 'pairs');
  const narrow: FrameMapKind = plane.kind === 'near' ? 'minus' : 'plus';
  const blocks = tally.blockTotals.filter((_, b) => (tally.blockDifferences[b] ?? 0) > 0).length;
  // So few blocks give no error and so no number: the first looks show the maps without waiting for fits.
  const mapsAlone = request.look && blocks < LEAST_BLOCKS;
  const peaks = mapsAlone ? { plus: null, minus: null } : fitFramePeaks(maps, narrow);
  const spread = blockSpread(tally, tally.blockDifferences, maps.plus);
  const common = commonLight(tally);
  const first = peaks[narrow];
  // The other peak takes its amplitude from this one.
  const sound = isTrusted(first) && roomOf(first, maps[narrow]) >= LEAST_ROOM;
  const weights =
    !sound || blocks < LEAST_BLOCKS || isRepeated(spread) || isFlickering(common)
      ? null
      : drawBlockWeights(tally.blockTotals.length, request.resamples, request.seed);
  const method = `chi^2, pixel blur left in; block bootstrap, ${blocks} blocks of frames`;
  return {
    kind: 'frames',
    plane: plane.kind,
    scale,
    axes: {
      x: axisOf(peaks, 3, pixel, weights, tally.frames, method),
      y: axisOf(peaks, 5, pixel, weights, tally.frames, method),
    },
    checks: mapsAlone
      ? []
      : checkFramePlane({ tally, maps, peaks, narrow, blocks, spread, common, crosstalk, plane }),
    maps: framePlaneMaps({ tally, maps, peaks, pixel, scale, perPair }),
    statement: [
      `${plane.kind === 'near' ? 'Near' : 'Far'} field: covariance of ${tally.frames} frames of ${tally.width} x ${tally.height} pixels less that of consecutive frames, own pairs left out${crosstalk > 0 ? `, difference bins up to ${crosstalk} pixels left out` : ''}.${treatmentWords(treatment)}`,
      ...jointWords(tally),
    ],
    blocks,
  };
}

function jointWords({ jointRegion: region }: FrameTally): string[] {
  if (region === undefined) return [];
  return [
    `The joint distribution of the pixels x ${region.x0} to ${region.x1}, y ${region.y0} to ${region.y1} is that covariance pixel by pixel, with the end frames corrected.`,
  ];
}

function selfMapsOf(tally: FrameTally): SelfMaps {
  const spectra = new FrameSpectra(tally.width, tally.height);
  const cells = (2 * tally.width - 1) * (2 * tally.height - 1);
  return (image) => {
    const plus = new Float64Array(cells);
    const minus = new Float64Array(cells);
    spectra.addSquares(image, null);
    spectra.moveTo(plus, minus, 1);
    return { plus, minus };
  };
}

/** @param parameter 3 for xx, 5 for yy. */
function axisOf(
  peaks: Record<FrameMapKind, FramePeak | null>,
  parameter: 3 | 5,
  pixel: number,
  weights: BlockWeights | null,
  frames: number,
  method: string,
): AxisResult {
  const part = (peak: FramePeak | null): Resampled | null => {
    if (weights === null || !isTrusted(peak)) return null;
    const moves = resampleSums(weights, peak.influence, FIT_PARAMETERS);
    const base = totalInfluence(peak.influence)[parameter] as number;
    const central = parameter === 3 ? peak.xx : peak.yy;
    const resampled = Float64Array.from(
      { length: weights.resamples },
      (_, r) => pixel * pixel * (central + (moves[r * FIT_PARAMETERS + parameter] as number) - base),
    );
    const map = peak.kind === 'minus' ? 'difference' : 'sum';
    return {
      value: pixel * pixel * central,
      resampled,
      method: `Gaussian on a pedestal fitted to the ${map} map, ${method}`,
      n: frames,
    };
  };
  return {
    net: { ...noVariances, minus: part(peaks.minus), plus: part(peaks.plus) },
    moment: noVariances,
    raw: noVariances,
  };
}
