import type { RunResult } from '../../../../shared/contracts/engine';
import type { InputSetting, Preset } from '../../../../shared/contracts/preset';
import { currentAssignment, currentDials, currentStudy } from './bench-selectors';
import type { BenchState } from './bench-types';
import { changedDials } from './dial-history';
import { isReadAs } from './same-reading';

/** The presets of the bench. The bytes of acquisitions never leave the machine. */

export interface PresetOptions {
  /**
   * true for a preset: what was used is fixed, also where the engine proposed it. false for a session: a proposal stays
   * one, with its warnings, because nobody has confirmed it.
   */
  fixProposals: boolean;
}

export function presetOfBench(state: BenchState, name: string, { fixProposals }: PresetOptions): Preset {
  const assignment = currentAssignment(state);
  const study = currentStudy(state);
  const inputs: Record<string, InputSetting> = {};
  for (const { name: input } of study?.inputs ?? []) {
    const acquisition = state.shelf.find(({ id }) => id === assignment[input]);
    const waiting = state.waiting[input];
    if (acquisition !== undefined) {
      const { layout, layoutGiven, detector, detectorGiven, plane } = acquisition;
      // A proposed map carries a pitch nobody gave; it is proposed anew from the next file.
      inputs[input] = {
        layout: layoutGiven || fixProposals ? layout : null,
        detector: detectorGiven ? detector : null,
        plane,
      };
    } else if (waiting !== undefined) inputs[input] = waiting;
  }
  return { gemel: 1, kind: 'preset', name, study: state.study, dials: currentDials(state), inputs };
}

/** The preset a result names: only when it was run with exactly the dials and the readings of that preset. */
export function presetOfResult(
  state: BenchState,
  run: RunResult,
): { name: string; version: number | null } | null {
  const { preset } = state;
  const study = state.studies.find(({ id }) => id === run.output.study);
  if (preset === null || study === undefined || preset.study !== study.id) return null;
  if (changedDials(study.dials, run.provenance.dials, preset.dials).size > 0) return null;
  const isRead = study.inputs.every((spec) => {
    const given = preset.inputs[spec.name];
    const read = run.provenance.inputs.find(({ name }) => name === spec.name);
    return given === undefined || (read !== undefined && isReadAs(spec, given, read));
  });
  if (!isRead) return null;
  return { name: preset.name, version: preset.version };
}
