import type { ArrayMap } from '../../../shared/contracts/detector';
import type { TagTally } from '../../../shared/contracts/tally';
import { Problem } from '../../../shared/errors/problem';
import { drawBlockWeights } from '../../../shared/physics/bootstrap';
import { planeScale } from '../../../shared/physics/calibration';
import { formatFigure, formatMeasured } from '../format-figure';
import type { CountedInput } from '../study';
import { countTags } from '../tag-count';
import { LEAST_BLOCKS, type PlaneRequest, type PlaneResult } from './plane-result';
import { type ArmScales, analyseTagAxis } from './tag-axis';
import { checkTagPlane } from './tag-plane-checks';
import { tagPlaneMaps } from './tag-plane-maps';

export function analyseTagPlane(
  input: CountedInput & { tally: TagTally },
  request: PlaneRequest,
): PlaneResult {
  const { tally, plane } = input;
  if (plane === null) throw new Problem('bad-plane', 'The acquisition has no plane; say near or far field.');
  const scale = planeScale(plane);
  const scales: ArmScales = {
    signal: requireArray(input, 'signal').pitchUm * scale.signal,
    idler: requireArray(input, 'idler').pitchUm * scale.idler,
  };
  const weights =
    tally.slices < LEAST_BLOCKS ? null : drawBlockWeights(tally.slices, request.resamples, request.seed);
  const count = countTags(tally);
  const x = analyseTagAxis(tally, 'x', scales, weights);
  const y = analyseTagAxis(tally, 'y', scales, weights);
  const shifts = tally.window.shiftsTick.length;
  return {
    kind: 'tags',
    plane: plane.kind,
    scale,
    axes: { x: x.result, y: y.result },
    checks: checkTagPlane({ count, x, y, scales, plane: plane.kind }),
    maps: tagPlaneMaps({ count, x, y, scales, scale }),
    statement: [
      `${plane.kind === 'near' ? 'Near' : 'Far'} field: ${count.inWindow} raw pairs in a window of ${formatFigure(count.windowPs)} ps full width, ${formatMeasured(count.accidentals.shifted.value, count.accidentals.shifted.sigma)} of them accidental by ${shifts} shifted windows.`,
    ],
    blocks: tally.slices,
  };
}

function requireArray(input: CountedInput, arm: 'signal' | 'idler'): ArrayMap {
  const map = input.detector.kind === 'tags' ? input.detector[arm] : undefined;
  if (map === undefined) {
    throw new Problem(
      'bad-detector',
      `The detector map has no ${arm} array; add it in the detector map.`,
      arm,
    );
  }
  return map;
}
