import type { MapData, StudyOutput } from '../../../../shared/contracts/output';
import type { InputSetting, Preset } from '../../../../shared/contracts/preset';
import { presetSchema } from '../../../../shared/contracts/preset';
import type { MapFile, ResultFile } from '../../../../shared/contracts/result';

/** What the study found, as the plots take it, from a stored result and its fetched maps. */
export function toOutput(file: ResultFile, maps: Record<string, MapData>): StudyOutput {
  const { study, quantities, verdicts, checks, chosen, statement } = file;
  return { study, quantities, verdicts, checks, maps, chosen, statement };
}

/** The whole file again, its maps inline, as the command line writes it. */
export function toWholeFile(file: ResultFile, maps: Record<string, MapFile>): ResultFile {
  return { ...file, maps };
}

/**
 * The preset that repeats the result: study, dials, and for each input the layout, detector map and plane it was read
 * with. Null for a study this page does not know.
 */
export function toPreset(file: ResultFile, name: string): Preset | null {
  const inputs: Record<string, InputSetting> = {};
  for (const { name: input, layout, detector, plane } of file.provenance.inputs) {
    inputs[input] ??= { layout, detector, plane };
  }
  const { dials, preset } = file.provenance;
  const parsed = presetSchema.safeParse({
    gemel: 1,
    kind: 'preset',
    name: preset?.name ?? name,
    study: file.study,
    dials,
    inputs,
  });
  return parsed.success ? parsed.data : null;
}
