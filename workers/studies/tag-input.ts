import type { Arm } from '../../shared/contracts/detector';
import type { TagTally } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import type { Chosen, CountedInput, StudyInput } from './study';

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

/** The counted tags of an input. @throws Problem `missing-input` or `bad-input`. */
export function requireTagInput(
  inputs: Partial<Record<string, CountedInput>>,
  name: string,
): { tally: TagTally; chosen: Chosen; input: CountedInput } {
  const input = inputs[name];
  if (input === undefined) {
    throw new Problem('missing-input', `The input "${name}" is missing; choose an acquisition for it.`, name);
  }
  if (input.tally.kind !== 'tags') {
    throw new Problem('bad-input', `The input "${name}" needs time tags; frames were counted.`, name);
  }
  return { tally: input.tally, chosen: input.chosen, input };
}
