import type { QueryClient } from '@tanstack/react-query';
import type { Samples } from '../../../../shared/contracts/http';
import { Problem } from '../../../../shared/errors/problem';
import { presetQuery } from '../../../lib/query/presets';
import { resultQuery } from '../../../lib/query/results';
import { samplesQuery } from '../../../lib/query/samples';
import { sessionQuery } from '../../../lib/query/sessions';
import { toPreset } from '../../../lib/result-preset';
import { fetchSample } from '../api/sample-file';
import { partsOf } from './acquisition';
import type { BenchStore, SampleFile } from './bench-store';
import { DEFAULT_SEED } from './bench-types';

/** What the address asks to be put on the bench. */
export type Wanted =
  | { kind: 'session'; id: string }
  | { kind: 'preset'; id: string; version: number | null }
  | { kind: 'result'; id: string }
  | { kind: 'sample'; index: number };

export function readWanted(search: URLSearchParams): Wanted | null {
  const session = search.get('session');
  if (session !== null) return { kind: 'session', id: session };
  const preset = search.get('preset');
  if (preset !== null) {
    const version = Number(search.get('version'));
    return { kind: 'preset', id: preset, version: Number.isInteger(version) && version > 0 ? version : null };
  }
  const result = search.get('result');
  if (result !== null) return { kind: 'result', id: result };
  const sample = search.get('sample');
  return sample === null ? null : { kind: 'sample', index: Number(sample) };
}

export interface Opener {
  store: BenchStore;
  queries: QueryClient;
  groupId: string;
}

export function openWanted(opener: Opener, wanted: Wanted): Promise<void> {
  if (wanted.kind === 'session') return openSession(opener, wanted.id);
  if (wanted.kind === 'preset') return openPreset(opener, wanted.id, wanted.version);
  if (wanted.kind === 'result') return openResult(opener, wanted.id);
  return openSampleAt(opener, wanted.index);
}

async function openSession({ store, queries, groupId }: Opener, id: string): Promise<void> {
  const row = await queries.fetchQuery(sessionQuery(groupId, id));
  const actions = store.getState();
  // Files of the session that are still at hand need not be asked for again.
  const held = actions.shelf.flatMap((a) =>
    partsOf(a).flatMap((part) =>
      part.file === null || (part === a && a.sample !== null) ? [] : [part.file],
    ),
  );
  actions.openSession({ id: row.id, name: row.name }, row.state);
  actions.say(`Session ${row.name} opened.`);
  const own = row.state.shelf.flatMap((a) => [
    ...(a.sample === null ? [a] : []),
    ...(a.following ?? []),
    ...(a.companion ? [a.companion] : []),
  ]);
  for (const { name, bytes } of own) {
    const file = held.find((candidate) => candidate.name === name && candidate.size === bytes);
    if (file !== undefined) actions.addFiles([{ file, sample: null }]);
    else actions.say(`Drop ${name} again: its bytes stayed on your machine.`);
  }
  const samples = new Set(row.state.shelf.flatMap(({ sample }) => sample ?? []));
  actions.addFiles(await Promise.all([...samples].map((sample) => fetchInOrder(sample, undefined))));
}

async function openPreset(
  { store, queries, groupId }: Opener,
  id: string,
  version: number | null,
): Promise<void> {
  const row = await queries.fetchQuery(presetQuery(groupId, id, version));
  const { study, dials, inputs, name } = row.preset;
  const actions = store.getState();
  actions.openSettings(
    { study, dials, inputs, seed: DEFAULT_SEED },
    { id: row.id, name, version: row.version, study, dials, inputs },
  );
  actions.say(`Preset ${name} v${row.version} opened.`);
}

/** Dials, readings and seed exactly as the result was found with, whatever has become of its preset. */
async function openResult({ store, queries, groupId }: Opener, id: string): Promise<void> {
  const row = await queries.fetchQuery(resultQuery(groupId, id));
  const preset = toPreset(row.result, row.name);
  if (preset === null) {
    throw new Problem(
      'bad-input',
      `The result ${row.name} is of a study this version of Gemel does not have (${row.study}). Open it with the version that made it (${row.result.provenance.engine}).`,
    );
  }
  const { study, dials, inputs } = preset;
  const { seed, preset: used } = row.result.provenance;
  const actions = store.getState();
  actions.openSettings(
    { study, dials, inputs, seed },
    // The result claims its preset only if dials and readings were the preset's.
    used === null ? null : { id: null, name: used.name, version: used.version, study, dials, inputs },
  );
  actions.say(`Settings of the result ${row.name} opened; open its acquisitions or others like them.`);
}

async function openSampleAt(opener: Opener, index: number): Promise<void> {
  const { presets } = await opener.queries.ensureQueryData(samplesQuery);
  const entry = presets[index];
  if (entry === undefined) {
    throw new Problem(
      'bad-input',
      `There is no sample ${Number.isNaN(index) ? 'of that number' : index}; there are ${presets.length}. Choose one under Open samples on the shelf.`,
    );
  }
  await openSample(opener.store, entry);
}

/** A sample preset with its acquisitions, in place of what is on the bench. */
export async function openSample(store: BenchStore, entry: Samples['presets'][number]): Promise<void> {
  const { preset, files } = entry;
  const { study, dials, inputs, name } = preset;
  const actions = store.getState();
  actions.clear();
  actions.openSettings(
    { study, dials, inputs, seed: DEFAULT_SEED },
    { id: null, name, version: null, study, dials, inputs },
  );
  actions.say(`Sample preset ${name} opened.`);
  actions.addFiles(
    await Promise.all(Object.entries(files).map(([input, sample]) => fetchInOrder(sample, input))),
  );
}

/** All samples are fetched before the first goes on the shelf, so that they stand there in their order. */
async function fetchInOrder(sample: string, input: string | undefined): Promise<SampleFile> {
  const file = await fetchSample(sample);
  return input === undefined ? { file, sample } : { file, sample, input };
}
