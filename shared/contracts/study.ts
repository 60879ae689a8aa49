import type { Arm } from './detector';
import type { DialSpec } from './dial';
import type { PlaneKind } from './plane';

export const studyIds = ['delay', 'joint-map', 'witness', 'ghost-image'] as const;
export type StudyId = (typeof studyIds)[number];

export interface InputSpec {
  name: string;
  label: string;
  accepts: readonly ('tags' | 'frames')[];
  /** Arms the detector map must give when the input is tags. */
  arms: readonly Arm[];
  /** Other sets of arms that serve as well, e.g. the bucket in place of an array. */
  otherArms?: readonly (readonly Arm[])[];
  /** Plane the input must carry, `any` for either, `none` when no calibration is used. */
  plane: PlaneKind | 'any' | 'none';
}

/** What the page and the command line need to know of a study, without its code. */
export interface StudyInfo {
  id: StudyId;
  label: string;
  /** One sentence: the question it answers. */
  answers: string;
  inputs: readonly InputSpec[];
  dials: readonly DialSpec[];
}
