import type { Check, MapData } from '../../../shared/contracts/output';
import type { PlaneScale } from '../../../shared/physics/calibration';
import type { FrameChoices } from './frame-dials';
import type { Resampled } from './resampled';

/** Variances of one transverse axis in crystal units squared (um^2 or rad^2/mm^2). Null where a number would be invented. */
export interface AxisVariances {
  /** Var(x1 - x2) and Var(x1 + x2). */
  minus: Resampled | null;
  plus: Resampled | null;
  /** V(signal | idler) and V(idler | signal). */
  conditionalSignal: Resampled | null;
  conditionalIdler: Resampled | null;
  /** Var of the signal coordinate alone. */
  signal: Resampled | null;
  /** Correlation coefficient. */
  correlation: Resampled | null;
}

export interface AxisResult {
  /** Accidental-subtracted: fitted. */
  net: AxisVariances;
  /** Accidental-subtracted: second moments. */
  moment: AxisVariances;
  /** Nothing subtracted: second moments. */
  raw: AxisVariances;
}

export type AxisName = 'x' | 'y';
export const axisNames: readonly AxisName[] = ['x', 'y'];

/** Everything that one acquisition in one plane says about its pairs. */
export interface PlaneResult {
  kind: 'tags' | 'frames';
  plane: 'near' | 'far';
  scale: PlaneScale;
  axes: Record<AxisName, AxisResult>;
  checks: Check[];
  maps: Record<string, MapData>;
  /** Sentences for the statement. */
  statement: string[];
  blocks: number;
}

export const noVariances: AxisVariances = {
  minus: null,
  plus: null,
  conditionalSignal: null,
  conditionalIdler: null,
  signal: null,
  correlation: null,
};

/** Below this many blocks no error is quoted, and so no number. */
export const LEAST_BLOCKS = 8;

export interface PlaneRequest {
  resamples: number;
  seed: number;
  /** A look while reading: what can give no number yet is left out. */
  look: boolean;
  frames: FrameChoices;
}
