import { queryOptions } from '@tanstack/react-query';
import { type PresetRow, presetListSchema, presetRowSchema } from '../../../shared/contracts/http';
import { request } from '../http/request';

/** Newest version of each preset of the group. */
export function presetsQuery(groupId: string) {
  return queryOptions({
    queryKey: ['groups', groupId, 'presets'],
    queryFn: async ({ signal }): Promise<PresetRow[]> =>
      (await request(presetListSchema, `/api/groups/${groupId}/presets`, { signal })).presets,
  });
}

/** One version of a preset; the newest when `version` is null. */
export function presetQuery(groupId: string, id: string, version: number | null) {
  const query = version === null ? '' : `?version=${version}`;
  return queryOptions({
    queryKey: ['groups', groupId, 'presets', id, version],
    queryFn: ({ signal }): Promise<PresetRow> =>
      request(presetRowSchema, `/api/groups/${groupId}/presets/${encodeURIComponent(id)}${query}`, {
        signal,
      }),
  });
}
