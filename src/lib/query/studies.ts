import { queryOptions } from '@tanstack/react-query';
import type { StudyInfo } from '../../../shared/contracts/study';
import { Problem } from '../../../shared/errors/problem';
import { getEngine } from '../workers/engine-client';

/** Studies with their dials, told by the engine; asking starts its workers. */
export const studiesQuery = queryOptions({
  queryKey: ['studies'],
  queryFn: async (): Promise<StudyInfo[]> => {
    const outcome = await getEngine().studies();
    if (outcome.status === 'ok') return outcome.value;
    if (outcome.status === 'cancelled')
      throw new Problem('internal', 'Asking for the studies was cancelled.');
    const { code, message, place } = outcome.problem;
    throw new Problem(code, message, place);
  },
  staleTime: Number.POSITIVE_INFINITY,
});
