import type { DialSpec, DialValues } from '../../../../shared/contracts/dial';
import type { RunRequest } from '../../../../shared/contracts/engine';
import type { StudyInfo } from '../../../../shared/contracts/study';
import { kindOf } from './acquisition';
import type { BenchState } from './bench-types';
import { completeDials, type DialHistory, startHistory } from './dial-history';
import { isReadAs } from './same-reading';
import { assignInputs, type Need, readyInputs } from './study-inputs';

/** What decides what is run; the rest of the bench is what came of it. */
export type BenchPlan = Pick<
  BenchState,
  'study' | 'studies' | 'shelf' | 'chosen' | 'dials' | 'preset' | 'seed'
>;

export function currentStudy({ studies, study }: BenchPlan): StudyInfo | null {
  return studies.find(({ id }) => id === study) ?? null;
}

export function currentHistory({ dials, study }: BenchPlan): DialHistory {
  return dials[study] ?? startHistory({});
}

export function currentAssignment(state: BenchPlan): Record<string, string | null> {
  const study = currentStudy(state);
  return study === null ? {} : assignInputs(study, state.shelf, state.chosen[state.study] ?? {});
}

/** Dials as a preset or the engine takes them: all of them, defaults filled in. */
export function currentDials(state: BenchPlan): DialValues {
  const study = currentStudy(state);
  return study === null ? {} : completeDials(study.dials, currentHistory(state).present);
}

/** What "changed" is measured from: the preset's dials for its own study, the defaults for the others. */
export function baseDials({ preset, study }: BenchPlan): DialValues {
  return preset?.study === study ? preset.dials : {};
}

/** Acquisitions in use whose reading is a proposal that nobody has applied: their numbers rest on a guess. */
export function guessedReadings(plan: BenchPlan): { id: string; name: string }[] {
  const held = new Set(Object.values(currentAssignment(plan)));
  return plan.shelf
    .filter((a) => held.has(a.id) && a.reading.status === 'read' && !a.layoutGiven && !a.detectorGiven)
    .map(({ id, name }) => ({ id, name }));
}

/** Is an acquisition read otherwise than the preset says? */
export function isReadingChanged(plan: BenchPlan): boolean {
  const study = currentStudy(plan);
  const { preset, shelf } = plan;
  if (study === null || preset?.study !== study.id) return false;
  const assignment = currentAssignment(plan);
  return study.inputs.some((spec) => {
    const given = preset.inputs[spec.name];
    const read = shelf.find(({ id }) => id === assignment[spec.name]);
    return given !== undefined && read !== undefined && !isReadAs(spec, given, read);
  });
}

/** The dials that concern what is analysed: all of them until it is known whether tags or frames. */
export function concernedDials(plan: BenchPlan): readonly DialSpec[] {
  const dials = currentStudy(plan)?.dials ?? [];
  const held = new Set(Object.values(currentAssignment(plan)));
  const kinds = new Set(plan.shelf.filter(({ id }) => held.has(id)).map(kindOf));
  kinds.delete(null);
  if (kinds.size === 0) return dials;
  return dials.filter((spec) => spec.for === undefined || kinds.has(spec.for));
}

export interface Plan {
  needs: Need[];
  /** null while something is missing. */
  request: Omit<RunRequest, 'jobId'> | null;
  /** Same key, same output. */
  key: string;
  /** The part of the key that names bytes and how they are read. */
  inputsKey: string;
}

/** What would be run now. */
export function planRun(state: BenchPlan): Plan {
  const study = currentStudy(state);
  if (study === null) return { needs: [], request: null, key: '', inputsKey: '' };
  const assignment = currentAssignment(state);
  const { needs, inputs } = readyInputs(study, state.shelf, assignment);
  const dials = currentDials(state);
  const inputsKey = JSON.stringify([
    study.id,
    study.inputs.map(({ name }) => {
      const input = inputs[name];
      if (input === undefined) return null;
      const { source, following = [], companion, ...reading } = input;
      const files = [source, ...following].map(({ key }) => key);
      return [
        name,
        assignment[name],
        files,
        companion && { ...companion, source: companion.source.key },
        reading,
      ];
    }),
  ]);
  return {
    needs,
    request: needs.length > 0 ? null : { study: study.id, inputs, dials, seed: state.seed },
    key: `${inputsKey}${JSON.stringify([dials, state.seed])}`,
    inputsKey,
  };
}

/** The stored result of what would be run now; null once a dial or an input is another. */
export function linkedResult(state: BenchPlan & Pick<BenchState, 'saved'>): string | null {
  const saved = state.saved[state.study];
  if (saved === undefined) return null;
  return saved.key === null || saved.key === planRun(state).key ? saved.id : null;
}
