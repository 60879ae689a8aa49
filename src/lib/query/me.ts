import { queryOptions, useQuery, useSuspenseQuery } from '@tanstack/react-query';
import { type Me, meSchema, type ServerInfo, serverInfoSchema } from '../../../shared/contracts/http';
import { may } from '../../../shared/contracts/permissions';
import { request } from '../http/request';
import { useGroupChoice } from './group-choice';

export const meQuery = queryOptions({
  queryKey: ['me'],
  queryFn: ({ signal }): Promise<Me> => request(meSchema, '/api/me', { signal }),
  staleTime: 60_000,
});

export const serverQuery = queryOptions({
  queryKey: ['server'],
  queryFn: ({ signal }): Promise<ServerInfo> => request(serverInfoSchema, '/api/server', { signal }),
  staleTime: Number.POSITIVE_INFINITY,
});

/** Signed-in routes load it first, so it is there. */
export function useMe(): Me {
  return useSuspenseQuery(meQuery).data;
}

export function useServerInfo() {
  return useQuery(serverQuery);
}

export type Group = Me['groups'][number];

/** The group the person works in: the chosen one, else the first; null for a person without a group. */
export function useGroup(): Group | null {
  const { groups } = useMe();
  const chosen = useGroupChoice((state) => state.id);
  return groups.find((group) => group.id === chosen) ?? groups[0] ?? null;
}

/** For pages that stand behind the shell, which shows a notice in their place when there is no group. */
export function useOwnGroup(): Group {
  const group = useGroup();
  if (group === null) throw new Error('This page needs a group; the shell shows it only with one.');
  return group;
}

/** Guests read results; presets, sessions and the bench are for those who work with data. */
export function mayUseBench(group: Group): boolean {
  return may(group.role, 'sessions.use');
}
