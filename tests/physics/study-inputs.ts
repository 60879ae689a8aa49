import type { FrameTally, TagTally } from '../../shared/contracts/tally';
import type { CountedInput } from '../../workers/studies/study';
import { arrayMap, tagInput } from '../support/run-study';

/** Near: 25 um in the crystal per pixel; far: 2 pi 50 um / (810 nm 100 mm) per pixel. */
export const nearPlane = {
  version: 1 as const,
  kind: 'near' as const,
  magnification: { value: 2, sigma: 0.02 },
};
export const farPlane = {
  version: 1 as const,
  kind: 'far' as const,
  focalLengthMm: { value: 100, sigma: 1 },
  signalNm: { value: 810, sigma: 0 },
  idlerNm: { value: 810, sigma: 0 },
};
export const PITCH_UM = 50;

export function countedTags(tally: TagTally, plane: typeof nearPlane | typeof farPlane): CountedInput {
  const { width, height } = tally.a;
  const detector = {
    version: 1 as const,
    kind: 'tags' as const,
    signal: { ...arrayMap(width, height, 0), pitchUm: PITCH_UM },
    idler: { ...arrayMap(width, height, width * height), pitchUm: PITCH_UM },
  };
  return {
    ...tagInput(detector, tally.records, tally.tickFs),
    plane,
    tally,
    chosen: { delay: 0, window: 2100, sigma: 300, 'histogram.bin': 100 },
  };
}

export function countedFrames(tally: FrameTally, plane: typeof nearPlane | typeof farPlane): CountedInput {
  const { width, height, frames } = tally;
  return {
    layout: { version: 1, format: 'hdf5', kind: 'frames', dataset: 'frames' },
    detector: { version: 1, kind: 'frames', pitchUm: PITCH_UM, maskedPixels: [] },
    plane,
    facts: { kind: 'frames', frames, width, height, type: 'uint8', reader: 'test' },
    tally,
    chosen: {},
  };
}
