import type { PresetRow } from '../../shared/contracts/http';
import { presetWriteSchema } from '../../shared/contracts/http';
import type { PresetRecord, Presets } from '../data/repositories/presets';
import { notFound, Refusal } from '../platform/refusal';
import { isId, type Member } from './access';
import { cleanName, parseBody } from './parse-body';

function toRow(record: PresetRecord): PresetRow {
  return {
    id: record.id,
    createdAt: record.createdAt.toISOString(),
    updatedAt: record.updatedAt.toISOString(),
    by: record.by,
    byId: record.byId,
    name: record.body.name,
    study: record.body.study,
    version: record.version,
    preset: record.body,
  };
}

export async function listPresets(presets: Presets, member: Member): Promise<PresetRow[]> {
  return (await presets.list(member.groupId)).map(toRow);
}

/** `version` null: the newest. */
export async function getPreset(
  presets: Presets,
  member: Member,
  id: string,
  version: string | null,
): Promise<PresetRow> {
  const wanted = version === null ? null : Number(version);
  const asked = isId(id) && (wanted === null || (Number.isInteger(wanted) && wanted > 0 && wanted < 2 ** 31));
  const record = asked ? await presets.find(member.groupId, id, wanted) : null;
  if (record === null) throw notFound('preset');
  return toRow(record);
}

export async function createPreset(presets: Presets, member: Member, body: unknown): Promise<PresetRow> {
  const { preset } = parseBody(presetWriteSchema, body);
  const named = { ...preset, name: cleanName(preset.name, 'preset.name') };
  const id = await presets.insert(member.groupId, member.userId, named);
  return getPreset(presets, member, id, null);
}

/** Adds a version; the earlier ones stay as they are. */
export async function addPresetVersion(
  presets: Presets,
  member: Member,
  id: string,
  body: unknown,
): Promise<PresetRow> {
  const current = await getPreset(presets, member, id, null);
  const { preset } = parseBody(presetWriteSchema, body);
  if (preset.study !== current.study) {
    throw new Refusal(
      'bad-input',
      `This preset is of the study ${current.study} and the new version is of ${preset.study}: store it as a new preset.`,
      'preset.study',
    );
  }
  const named = { ...preset, name: cleanName(preset.name, 'preset.name') };
  const version = await presets.append(id, member.userId, named);
  return getPreset(presets, member, id, String(version));
}
