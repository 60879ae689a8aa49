import type { Arm } from '../../shared/contracts/detector';
import { Problem } from '../../shared/errors/problem';
import type { StudyInput } from './study';

/** Tick of a tag input. @throws Problem `bad-input` for frames. */
export function tickFsOf(input: StudyInput): number {
  if (input.facts.kind !== 'tags') {
    throw new Problem('bad-input', 'Time tags were expected but frames were found; choose a tag file.');
  }
  return input.facts.tickFs;
}

/** Whether the detector map names the arm. */
export function hasArm(input: StudyInput, arm: Arm): boolean {
  return input.detector.kind === 'tags' && input.detector[arm] !== undefined;
}
