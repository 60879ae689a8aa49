import { queryOptions } from '@tanstack/react-query';
import {
  type ResultRow,
  type ResultSummary,
  resultListSchema,
  resultRowSchema,
} from '../../../shared/contracts/http';
import { request } from '../http/request';

export function resultsQuery(groupId: string) {
  return queryOptions({
    queryKey: ['groups', groupId, 'results'],
    queryFn: async ({ signal }): Promise<ResultSummary[]> =>
      (await request(resultListSchema, `/api/groups/${groupId}/results`, { signal })).results,
  });
}

/** A result never changes; its maps are addresses. */
export function resultQuery(groupId: string, id: string) {
  return queryOptions({
    queryKey: ['groups', groupId, 'results', id],
    queryFn: ({ signal }): Promise<ResultRow> =>
      request(resultRowSchema, `/api/groups/${groupId}/results/${encodeURIComponent(id)}`, { signal }),
    staleTime: Number.POSITIVE_INFINITY,
  });
}
