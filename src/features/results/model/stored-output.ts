import type { MapData, StudyOutput } from '../../../../shared/contracts/output';
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
