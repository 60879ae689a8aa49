import type { PresetRow } from '../../../../shared/contracts/http';
import type { ResultFile } from '../../../../shared/contracts/result';

export interface FoundPreset {
  id: string;
  /** An earlier version than the newest; null for the newest. */
  version: number | null;
}

/** The group's preset a result was made with: a result knows its name, study and version, not where it is stored. */
export function findPreset(file: ResultFile, presets: readonly PresetRow[]): FoundPreset | null {
  const used = file.provenance.preset;
  if (used === null) return null;
  const found = presets.find(
    ({ name, study, version }) =>
      name === used.name && study === file.study && (used.version ?? version) <= version,
  );
  if (found === undefined) return null;
  const earlier = used.version !== null && used.version < found.version;
  return { id: found.id, version: earlier ? used.version : null };
}
