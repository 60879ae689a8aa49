import { type ResultRow, type ResultSummary, resultWriteSchema } from '../../shared/contracts/http';
import type { MapStore } from '../data/map-store';
import type { ResultSummaryRecord, Results, StoredMap } from '../data/repositories/results';
import { notFound, Refusal } from '../platform/refusal';
import { isId, type Member, requireAction } from './access';
import { pickHeadline } from './headline';
import { assertMapComplete, packMap, withAddresses, withoutArrays } from './map-files';
import { cleanName, parseBody } from './parse-body';

export interface ResultStores {
  results: Results;
  maps: MapStore;
}

const mostMaps = 200;

function toSummary(record: ResultSummaryRecord): ResultSummary {
  return {
    id: record.id,
    createdAt: record.createdAt.toISOString(),
    // A result never changes.
    updatedAt: record.createdAt.toISOString(),
    by: record.by,
    byId: record.byId,
    name: record.name,
    study: record.study,
    headline: record.headline,
  };
}

export async function listResults({ results }: ResultStores, member: Member): Promise<ResultSummary[]> {
  return (await results.list(member.groupId)).map(toSummary);
}

export async function getResult({ results }: ResultStores, member: Member, id: string): Promise<ResultRow> {
  const record = isId(id) ? await results.find(member.groupId, id) : null;
  if (record === null) throw notFound('result');
  const { headline: _headline, ...stamp } = toSummary(record);
  const hashes = new Map(record.maps.map((map) => [map.name, map.hash]));
  const addressOf = (name: string) => `/api/groups/${member.groupId}/maps/${hashes.get(name) ?? ''}`;
  return { ...stamp, result: withAddresses(record.body, addressOf) };
}

/** Every map is on disk before the row that names it, so a row never points at nothing. */
export async function saveResult(
  stores: ResultStores,
  member: Member,
  body: unknown,
): Promise<ResultSummary> {
  const { name, result: file } = parseBody(resultWriteSchema, body);
  const entries = Object.entries(file.maps);
  if (entries.length > mostMaps) {
    throw new Refusal(
      'bad-input',
      `A result may carry up to ${mostMaps} maps; this one has ${entries.length}.`,
      'result.maps',
    );
  }
  for (const [key, map] of entries) {
    cleanName(key, 'result.maps');
    assertMapComplete(key, map);
  }
  const row = {
    groupId: member.groupId,
    madeBy: member.userId,
    name: cleanName(name, 'name'),
    study: cleanName(file.study, 'result.study'),
    headline: pickHeadline(file),
    body: withoutArrays(file),
  };
  const id = await stores.maps.alone(async () => {
    const maps: StoredMap[] = [];
    for (const [key, map] of entries) maps.push({ name: key, ...(await stores.maps.write(packMap(map))) });
    return stores.results.insert({ ...row, maps });
  });
  const record = await stores.results.find(member.groupId, id);
  if (record === null) throw notFound('result');
  return toSummary(record);
}

/** The maker may, and whoever may delete results of others. Maps no other result names go with it. */
export async function deleteResult(stores: ResultStores, member: Member, id: string): Promise<void> {
  const record = isId(id) ? await stores.results.find(member.groupId, id) : null;
  if (record === null) throw notFound('result');
  if (record.byId !== member.userId) requireAction(member, 'results.delete-any');
  await stores.maps.alone(async () => {
    const unused = await stores.results.remove(member.groupId, id);
    for (const hash of unused) await stores.maps.remove(hash);
  });
}

/** JSON of a MapFile, only when a result of the group names it. */
export async function getMap(
  { results, maps }: ResultStores,
  member: Member,
  hash: string,
): Promise<{ raw: Buffer; gzip: Buffer }> {
  const known = /^[0-9a-f]{64}$/.test(hash) && (await results.hasMap(member.groupId, hash));
  if (!known) throw notFound('map');
  const stored = await maps.read(hash);
  if (stored === null) {
    throw new Refusal(
      'internal',
      'The numbers of this map are missing or damaged on the server; restore the maps folder from a backup.',
      hash,
    );
  }
  return stored;
}
