import type { BenchState as SavedBench } from '../../../../shared/contracts/http';
import { type StudyId, studyIds } from '../../../../shared/contracts/study';
import { type Acquisition, type CompanionFile, type FilePart, newAcquisition } from './acquisition';
import { presetOfBench } from './bench-records';
import { currentAssignment, currentDials, linkedResult } from './bench-selectors';
import type { BenchState } from './bench-types';
import { type DialHistory, startHistory } from './dial-history';
import type { Assignment } from './study-inputs';

/** A session: the whole bench but its runs and its bytes. */

/** Inputs as places on the shelf, because the ids of acquisitions live as long as the page. */
type Places = Record<string, number | null>;

export function sessionOfBench(state: BenchState, name: string): SavedBench {
  const { shelf, chosen, study } = state;
  const assignment = currentAssignment(state);
  const placesOf = (held: Assignment): Places =>
    Object.fromEntries(
      Object.entries(held).flatMap(([input, id]) => {
        const place = shelf.findIndex((a) => a.id === id);
        return id === null || place >= 0 ? [[input, id === null ? null : place]] : [];
      }),
    );
  const served = Object.fromEntries(Object.entries(assignment).filter(([, id]) => id !== null));
  const inputOf = (id: string): string | null =>
    Object.entries(assignment).find(([, held]) => held === id)?.[0] ?? null;
  return {
    version: 1,
    study,
    preset: presetOfBench(state, name, { fixProposals: false }),
    shelf: shelf.map((a) => ({
      ...savedPart(a),
      input: inputOf(a.id),
      sample: a.sample,
      // A layout nobody confirmed is proposed anew; a map may have been corrected before its pitch is known.
      layout: a.layoutGiven ? a.layout : null,
      detector: a.detector,
      detectorGiven: a.detectorGiven,
      plane: a.plane,
      ...(a.following.length === 0 ? {} : { following: a.following.map(savedPart) }),
      ...(a.companion === null ? {} : { companion: savedCompanion(a.companion) }),
    })),
    dials: {
      ...Object.fromEntries(Object.entries(state.dials).map(([id, { present }]) => [id, present])),
      [study]: currentDials(state),
    },
    assigned: {
      ...Object.fromEntries(Object.entries(chosen).map(([id, held]) => [id, placesOf(held)])),
      [study]: placesOf({ ...served, ...chosen[study] }),
    },
    seed: state.seed,
    resultId: linkedResult(state),
  };
}

type SavedPart = Pick<SavedBench['shelf'][number], 'name' | 'bytes' | 'sha256'>;
type SavedCompanion = NonNullable<SavedBench['shelf'][number]['companion']>;

function savedPart({ name, bytes, sha256, expectedSha256 }: FilePart): SavedPart {
  return { name, bytes, sha256: sha256 ?? expectedSha256 };
}

function savedCompanion(companion: CompanionFile): SavedCompanion {
  const { layout, channelOffset, clock } = companion;
  return { ...savedPart(companion), layout, channelOffset, clock };
}

/** A file that must be handed over again. */
function awaitedPart({ name, bytes, sha256 }: SavedPart): FilePart {
  return { name, bytes, file: null, sha256: null, expectedSha256: sha256 };
}

function awaitedCompanion(saved: SavedCompanion): CompanionFile {
  const { layout, channelOffset, clock } = saved;
  return { ...awaitedPart(saved), layout, channelOffset, clock, facts: null };
}

function byStudy<T, U>(entries: Record<string, T>, of: (value: T) => U): Partial<Record<StudyId, U>> {
  return Object.fromEntries(
    // A study of a later version is not on this bench.
    studyIds.flatMap((id) => (entries[id] === undefined ? [] : [[id, of(entries[id])]])),
  );
}

export type RestoredBench = Pick<
  BenchState,
  'study' | 'shelf' | 'chosen' | 'dials' | 'waiting' | 'seed' | 'saved'
>;

/** The bench a session describes; its acquisitions wait for their bytes. */
export function benchOfSession(saved: SavedBench, nextId: () => string): RestoredBench {
  const { preset, seed, resultId } = saved;
  const { study } = preset;
  const shelf = saved.shelf.map((entry): Acquisition => {
    const { name, bytes, sample, input, following = [], companion } = entry;
    // Sessions of before the shelf kept its readings know only those of the inputs.
    const setting = input === null ? undefined : preset.inputs[input];
    const layout = entry.layout ?? setting?.layout ?? null;
    const detector = entry.detector ?? setting?.detector ?? null;
    return {
      ...newAcquisition(nextId(), { name, bytes, file: null, sample }),
      ...awaitedPart(entry),
      following: following.map(awaitedPart),
      companion: companion === undefined ? null : awaitedCompanion(companion),
      layout,
      layoutGiven: layout !== null,
      detector,
      detectorGiven: entry.detectorGiven ?? detector !== null,
      plane: entry.plane ?? setting?.plane ?? null,
    };
  });
  const served: Places = Object.fromEntries(
    saved.shelf.flatMap(({ input }, place) => (input === null ? [] : [[input, place]])),
  );
  const idsOf = (places: Places): Assignment =>
    Object.fromEntries(
      Object.entries(places).flatMap(([input, place]) => {
        const id = place === null ? null : shelf[place]?.id;
        return id === undefined ? [] : [[input, id]];
      }),
    );
  const turned: Partial<Record<StudyId, DialHistory>> = byStudy(saved.dials ?? {}, startHistory);
  return {
    study,
    seed,
    shelf,
    chosen: byStudy(saved.assigned ?? { [study]: served }, idsOf),
    dials: { ...turned, [study]: startHistory(preset.dials) },
    waiting: Object.fromEntries(Object.entries(preset.inputs).filter(([input]) => !(input in served))),
    saved: resultId === null ? {} : { [study]: { id: resultId, key: null } },
  };
}
