import type { RunInput } from '../../shared/contracts/engine';
import type { ReadRange } from '../../shared/contracts/reader';
import type { TallySpec } from '../../shared/contracts/tally';
import type { StudyInput } from '../studies/study';
import type { MemoKey } from './tally-memo';

export interface CountRequest {
  name: string;
  input: RunInput;
  studyInput: StudyInput;
  spec: TallySpec;
}

export function memoKey(request: CountRequest): MemoKey {
  const { facts } = request.studyInput;
  return {
    ...request.input,
    spec: request.spec,
    range: { start: 0, end: facts.kind === 'tags' ? facts.records : facts.frames },
  };
}

export function sizeOf(ranges: readonly ReadRange[]): number {
  return ranges.reduce((sum, { start, end }) => sum + end - start, 0);
}
