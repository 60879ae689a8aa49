import { queryOptions } from '@tanstack/react-query';
import { type Samples, samplesSchema } from '../../../shared/contracts/http';
import { request } from '../http/request';

export const samplesQuery = queryOptions({
  queryKey: ['samples'],
  queryFn: ({ signal }): Promise<Samples> => request(samplesSchema, '/api/samples', { signal }),
  staleTime: Number.POSITIVE_INFINITY,
});
