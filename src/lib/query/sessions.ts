import { queryOptions } from '@tanstack/react-query';
import { type SessionRow, sessionListSchema, sessionRowSchema } from '../../../shared/contracts/http';
import type { z } from '../../../shared/util/zod';
import { request } from '../http/request';

export type SessionSummary = z.infer<typeof sessionListSchema>['sessions'][number];

/** The person's own sessions in the group. */
export function sessionsQuery(groupId: string) {
  return queryOptions({
    queryKey: ['groups', groupId, 'sessions'],
    queryFn: async ({ signal }): Promise<SessionSummary[]> =>
      (await request(sessionListSchema, `/api/groups/${groupId}/sessions`, { signal })).sessions,
  });
}

export function sessionQuery(groupId: string, id: string) {
  return queryOptions({
    queryKey: ['groups', groupId, 'sessions', id],
    queryFn: ({ signal }): Promise<SessionRow> =>
      request(sessionRowSchema, `/api/groups/${groupId}/sessions/${encodeURIComponent(id)}`, { signal }),
  });
}
