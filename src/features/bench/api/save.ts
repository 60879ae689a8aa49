import type { RunResult } from '../../../../shared/contracts/engine';
import type { ResultSummary, BenchState as SavedBench, SessionRow } from '../../../../shared/contracts/http';
import {
  type PresetRow,
  presetRowSchema,
  resultSummarySchema,
  sessionRowSchema,
} from '../../../../shared/contracts/http';
import type { Preset } from '../../../../shared/contracts/preset';
import { encodeResult } from '../../../../shared/contracts/result-codec';
import { request } from '../../../lib/http/request';

const groupPath = (groupId: string): string => `/api/groups/${encodeURIComponent(groupId)}`;

export function saveResult(
  groupId: string,
  name: string,
  run: RunResult,
  preset: { name: string; version: number | null } | null,
): Promise<ResultSummary> {
  return request(resultSummarySchema, `${groupPath(groupId)}/results`, {
    method: 'POST',
    json: { name, result: encodeResult(run, preset) },
  });
}

/** A new preset, or the next version of the one given. */
export function savePreset(groupId: string, preset: Preset, versionOf: string | null): Promise<PresetRow> {
  const path = versionOf === null ? 'presets' : `presets/${encodeURIComponent(versionOf)}`;
  return request(presetRowSchema, `${groupPath(groupId)}/${path}`, { method: 'POST', json: { preset } });
}

/** A new session, or what is kept under `id` from now on. */
export function saveSession(
  groupId: string,
  name: string,
  state: SavedBench,
  id: string | null,
): Promise<SessionRow> {
  const path = id === null ? 'sessions' : `sessions/${encodeURIComponent(id)}`;
  return request(sessionRowSchema, `${groupPath(groupId)}/${path}`, {
    method: id === null ? 'POST' : 'PUT',
    json: { name, state },
  });
}
