import { queryOptions } from '@tanstack/react-query';
import { type MapFile, mapFileSchema } from '../../../../shared/contracts/result';
import { RequestProblem } from '../../../lib/errors/request-problem';
import { request } from '../../../lib/http/request';

/** A map with its numbers inline. Its address is the hash of its contents, so it never has to be fetched twice. */
export function mapQuery(id: string, map: MapFile) {
  return queryOptions({
    queryKey: ['map', map.file ?? id],
    queryFn: ({ signal }): Promise<MapFile> => fetchMap(id, map, signal),
    staleTime: Number.POSITIVE_INFINITY,
    gcTime: 60_000,
  });
}

async function fetchMap(id: string, map: MapFile, signal: AbortSignal): Promise<MapFile> {
  if (map.data !== undefined) return map;
  // Only addresses of this server's maps are followed, whatever a result file says.
  if (map.file === undefined || !/^\/api\/groups\/[^/]+\/maps\/[0-9a-f]{64}$/.test(map.file)) {
    throw new RequestProblem(
      'unreadable',
      `The map ${id} has neither numbers nor an address on this server; run the study again and save it anew.`,
      { place: `maps.${id}` },
    );
  }
  return request(mapFileSchema, map.file, { signal });
}
