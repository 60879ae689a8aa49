import type { DialSpec, DialValues } from '../../../shared/contracts/dial';
import type { FrameSpec, FrameTally, TagTally, TallySpec } from '../../../shared/contracts/tally';
import { Problem } from '../../../shared/errors/problem';
import {
  blocksDial,
  delayDial,
  histogramBinDial,
  histogramRangeDial,
  numberDial,
  resamplesDial,
  shiftCountDial,
  shiftStepDial,
  windowDial,
} from '../dials';
import { type ArmPair, blindChoice, buildSearchSpec, choosePeak } from '../peak-search';
import type { CountedInput, Study, StudyInput } from '../study';
import { buildMainSpec, validateTagInput } from '../tag-main';
import { frameChoices, frameDials, jointRegionOf } from './frame-dials';
import { analyseFramePlane } from './frame-plane';
import type { PlaneRequest, PlaneResult } from './plane-result';
import { analyseTagPlane } from './tag-plane';

/** What joint map and witness share: one acquisition in one plane, tags or frames. Arm A is the signal, arm B the idler. */
const arms: ArmPair = { a: 'signal', b: 'idler' };

export const planeDials: readonly DialSpec[] = [
  delayDial,
  windowDial,
  histogramRangeDial,
  histogramBinDial,
  shiftStepDial,
  shiftCountDial,
  ...frameDials,
  blocksDial,
  resamplesDial,
];

/** Search, choice and specification are the same for both studies. */
export const planeCounting: Pick<Study, 'searchSpec' | 'choose' | 'chooseBlind' | 'spec'> = {
  searchSpec: (input, dials) => (input.facts.kind === 'frames' ? null : buildSearchSpec(input, arms, dials)),
  choose: (tally, _input, dials) => choosePeak(tally, dials),
  chooseBlind: (_input, dials) => blindChoice(dials),
  spec: (input, dials, chosen): TallySpec =>
    input.facts.kind === 'frames' ? frameSpec(input, dials) : buildMainSpec(input, arms, dials, chosen),
};

/** @throws Problem `missing-input`, `bad-plane`, `bad-detector`, `bad-dial`. */
export function validatePlaneInput(
  inputs: Record<string, StudyInput>,
  name: string,
  wanted: 'near' | 'far' | 'any',
  dials: DialValues,
): void {
  const input = inputs[name];
  if (input === undefined) {
    throw new Problem('missing-input', `The input "${name}" is missing; choose an acquisition for it.`, name);
  }
  if (input.plane === null) {
    throw new Problem(
      'bad-plane',
      `The input "${name}" has no plane; say whether it is near or far field and give its calibration.`,
      name,
    );
  }
  if (wanted !== 'any' && input.plane.kind !== wanted) {
    throw new Problem(
      'bad-plane',
      `The input "${name}" needs a ${wanted}-field acquisition; this one is ${input.plane.kind} field. Swap the inputs or correct the plane.`,
      name,
    );
  }
  if (input.facts.kind === 'frames') frameSpec(input, dials);
  else validateTagInput(inputs, name, () => arms, dials);
}

function frameSpec(input: StudyInput, dials: DialValues): FrameSpec {
  const { facts, detector } = input;
  if (facts.kind !== 'frames') {
    throw new Problem('bad-input', 'Frames were expected but time tags were found; choose a frame stack.');
  }
  if (detector.kind !== 'frames') {
    throw new Problem(
      'bad-detector',
      'The file holds frames, but the detector map is of channels; give the detector map of a camera.',
      'detector',
    );
  }
  const { width, height, frames } = facts;
  if (frames < 2) {
    throw new Problem('bad-input', `Covariance needs at least 2 frames; the stack holds ${frames}.`);
  }
  const masked = new Uint8Array(width * height);
  for (const pixel of detector.maskedPixels) {
    if (pixel >= masked.length) {
      throw new Problem(
        'bad-detector',
        `Masked pixel ${pixel} is not on the camera, whose pixels run from 0 to ${masked.length - 1}; correct the mask.`,
        'detector',
      );
    }
    masked[pixel] = 1;
  }
  // A block of one frame has no difference of its own.
  const blocks = Math.max(1, Math.min(numberDial(dials, 'blocks'), Math.floor(frames / 2)));
  const { treatment } = frameChoices(dials);
  const jointRegion = jointRegionOf(dials, width, height);
  return { kind: 'frames', width, height, frames, blocks, masked, ...treatment, jointRegion };
}

export function analysePlane(input: CountedInput, request: PlaneRequest): PlaneResult {
  const { tally } = input;
  return tally.kind === 'tags'
    ? analyseTagPlane({ ...input, tally } satisfies CountedInput & { tally: TagTally }, request)
    : analyseFramePlane({ ...input, tally } satisfies CountedInput & { tally: FrameTally }, request);
}
