import { useMutation, useQueryClient } from '@tanstack/react-query';
import { z } from '../../../../shared/util/zod';
import { request } from '../../../lib/http/request';
import { resultQuery, resultsQuery } from '../../../lib/query/results';

export function useDeleteResult(groupId: string, id: string, onDone: () => void) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: () =>
      request(z.undefined(), `/api/groups/${groupId}/results/${encodeURIComponent(id)}`, {
        method: 'DELETE',
      }),
    onSuccess: async () => {
      onDone();
      client.removeQueries({ queryKey: resultQuery(groupId, id).queryKey });
      await client.invalidateQueries({ queryKey: resultsQuery(groupId).queryKey, exact: true });
    },
  });
}
