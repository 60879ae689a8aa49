import { createStore, type StoreApi } from 'zustand/vanilla';
import type { Detector } from '../../../../shared/contracts/detector';
import type { DialValues } from '../../../../shared/contracts/dial';
import type { Inspection } from '../../../../shared/contracts/engine';
import type { BenchState as SavedBench } from '../../../../shared/contracts/http';
import type { Layout } from '../../../../shared/contracts/layout';
import type { Plane } from '../../../../shared/contracts/plane';
import type { InputSetting } from '../../../../shared/contracts/preset';
import type { StudyId } from '../../../../shared/contracts/study';
import type { ProblemData } from '../../../../shared/errors/problem';
import { factsWords } from '../../../components/output/reading-words';
import type { EngineDoor } from '../../../lib/workers/engine-door';
import { type Acquisition, type CompanionFile, type FilePart, newAcquisition, partsOf } from './acquisition';
import { baseDials, currentAssignment, currentHistory, currentStudy } from './bench-selectors';
import { type BenchState, emptyBench, type PresetRef, type SessionRef } from './bench-types';
import { jointFacts } from './companion';
import {
  type DialHistory,
  redoDials,
  replaceDials,
  startHistory,
  turnDials,
  undoDials,
} from './dial-history';
import { isPitchKnown, proposeDetector } from './propose-detector';
import { joinAcquisitions, moveFile, splitAcquisition } from './sequence';
import { benchOfSession } from './session-bench';

/** What a person settles in the reading dialog. */
export interface ReadingChange {
  layout: Layout;
  detector: Detector | null;
  detectorGiven: boolean;
  plane: Plane | null;
  inspection: Inspection;
}

export interface SampleFile {
  file: File;
  sample: string | null;
  /** Input it is meant for, with its settings, when a preset says so. */
  input?: string;
}

export interface BenchSettings {
  study: StudyId;
  dials: DialValues;
  inputs: Record<string, InputSetting>;
  seed: number;
}

export interface BenchActions {
  loadStudies(): Promise<void>;
  addFiles(files: readonly SampleFile[]): void;
  lookAgain(id: string): void;
  changeReading(id: string, change: ReadingChange): void;
  remove(id: string): void;
  /** One acquisition of several, in this order; read as the first of them. */
  join(ids: readonly string[]): void;
  /** They stay separate acquisitions, and are not offered as one again. */
  keepApart(ids: readonly string[]): void;
  /** Another order of the files of one acquisition. */
  moveFile(id: string, from: number, to: number): void;
  split(id: string): void;
  /** Gives an acquisition its second clock, or takes it away; `fromShelf` names where the file came from. */
  changeCompanion(id: string, companion: CompanionFile | null, fromShelf?: string): void;
  assign(input: string, id: string | null): void;
  chooseStudy(study: StudyId): void;
  turn(values: DialValues): void;
  undo(): void;
  redo(): void;
  resetDials(): void;
  /** Study, dials and readings at once, from a preset (`ref`) or a result of none (null). */
  openSettings(settings: BenchSettings, ref: PresetRef | null): void;
  /** In place of what is on the bench; its acquisitions wait for their bytes. */
  openSession(session: SessionRef, saved: SavedBench): void;
  clear(): void;
  say(text: string, tone?: 'plain' | 'problem'): void;
}

export type BenchStore = StoreApi<BenchState & BenchActions>;

const MOST_LOG_LINES = 200;

function isAwaitedPart({ file, name, bytes }: FilePart, handed: File): boolean {
  return file === null && name === handed.name && bytes === handed.size;
}

/** The first file of that name and size that a session still waits for, handed over. */
function handOver({ following, companion }: Acquisition, file: File): Partial<Acquisition> {
  const place = following.findIndex((part) => isAwaitedPart(part, file));
  if (place >= 0) return { following: following.map((part, i) => (i === place ? { ...part, file } : part)) };
  return companion !== null && isAwaitedPart(companion, file) ? { companion: { ...companion, file } } : {};
}

/** The bench without its runs: shelf, study, dials. `attachRunner` adds the runs. */
export function createBenchStore(engine: EngineDoor): BenchStore {
  let counter = 0;
  const nextId = (): string => `a${++counter}`;
  return createStore((set, get) => {
    const patch = (id: string, change: Partial<Acquisition>): void =>
      set(({ shelf }) => ({ shelf: shelf.map((a) => (a.id === id ? { ...a, ...change } : a)) }));

    const fail = (acquisition: Acquisition, problem: ProblemData): void => {
      patch(acquisition.id, { reading: { status: 'failed', problem } });
      get().say(`${acquisition.name}: ${problem.message}`, 'problem');
    };

    /** `keepsMap`: a map that is there already came from a session or a result, also where its pitch is not known. */
    const look = async (id: string, { keepsMap }: { keepsMap: boolean }): Promise<void> => {
      const before = get().shelf.find((a) => a.id === id);
      if (before === undefined || before.file === null) return;
      patch(id, { reading: { status: 'looking' } });
      const source = { name: before.name, size: before.bytes, file: before.file };
      const outcome = await engine.inspect(source, before.layoutGiven ? before.layout : null);
      const now = get().shelf.find((a) => a.id === id);
      // Removed, or corrected by hand in the meantime: this look is of yesterday.
      if (now === undefined || now.reading.status !== 'looking') return;
      if (outcome.status === 'error') return fail(now, outcome.problem);
      if (outcome.status === 'cancelled') return;
      const inspection = outcome.value;
      const layout = now.layoutGiven ? now.layout : inspection.layout;
      const isMapKept = now.detectorGiven || (keepsMap && now.detector !== null);
      const seen = jointFacts(inspection.facts, now.companion);
      patch(id, {
        reading: { status: 'read', inspection },
        layout,
        ...(isMapKept ? {} : { detector: proposeDetector(seen)?.detector ?? null }),
      });
      get().say(`${now.name}: ${factsWords(inspection.facts)}.`);
    };

    /** The waiting setting an acquisition answers to: the input it is meant for, or the one its name says. */
    const takeSetting = (name: string, input: string | undefined, free: Set<string>): string | null => {
      if (input !== undefined) return input;
      const lower = name.toLowerCase();
      const named = [...free].filter((key) => lower.includes(key.toLowerCase()));
      return named[0] ?? (free.size === 1 ? [...free][0]! : null);
    };

    const withSetting = (acquisition: Acquisition, setting: InputSetting | undefined): Acquisition => {
      if (setting === undefined) return acquisition;
      return {
        ...acquisition,
        layout: setting.layout ?? acquisition.layout,
        layoutGiven: setting.layout !== null || acquisition.layoutGiven,
        detector: setting.detector ?? acquisition.detector,
        detectorGiven: setting.detector === null ? acquisition.detectorGiven : isPitchKnown(setting.detector),
        plane: setting.plane ?? acquisition.plane,
      };
    };

    const chooseFor = (input: string, id: string | null): void =>
      set(({ chosen, study }) => ({
        chosen: { ...chosen, [study]: { ...chosen[study], [input]: id } },
      }));

    /** A link that waits for its acquisitions is of the session as it was saved, not of what is changed before. */
    const dropPendingLink = (): void =>
      set(({ saved, study }) =>
        saved[study]?.key === null ? { saved: { ...saved, [study]: undefined } } : {},
      );

    const changeDials = (change: (history: DialHistory) => DialHistory): void => {
      dropPendingLink();
      set((state) => ({ dials: { ...state.dials, [state.study]: change(currentHistory(state)) } }));
    };

    return {
      ...emptyBench,

      async loadStudies() {
        const outcome = await engine.studies();
        if (outcome.status === 'ok') set({ studies: outcome.value, studiesProblem: null });
        else if (outcome.status === 'error') set({ studiesProblem: outcome.problem });
      },

      addFiles(files) {
        const added: string[] = [];
        const drop = ++counter;
        for (const { file, sample, input } of files) {
          const { shelf, waiting } = get();
          const named = shelf.filter((a) => a.reading.status === 'awaited' && a.name === file.name);
          // A sample made anew may have another size; its fingerprint will tell.
          const awaited = named.find(
            (a) => a.bytes === file.size || (sample !== null && a.sample === sample),
          );
          if (awaited !== undefined) {
            patch(awaited.id, { file, bytes: file.size, sample, reading: { status: 'looking' } });
            added.push(awaited.id);
            continue;
          }
          const incomplete = shelf.find((a) =>
            partsOf(a)
              .slice(1)
              .some((part) => isAwaitedPart(part, file)),
          );
          if (incomplete !== undefined) {
            patch(incomplete.id, handOver(incomplete, file));
            continue;
          }
          const almost = named[0];
          if (almost !== undefined) {
            get().say(
              `${file.name} has ${file.size} bytes, the session used one of ${almost.bytes}; it was added as another acquisition.`,
              'problem',
            );
          }
          const free = new Set(Object.keys(waiting));
          const setting = takeSetting(file.name, input, free);
          const fresh = newAcquisition(nextId(), { name: file.name, bytes: file.size, file, sample });
          const acquisition = withSetting(fresh, setting === null ? undefined : waiting[setting]);
          // What a preset or a sample has a place for is an acquisition of its own.
          const droppedWith = setting === null && sample === null && files.length > 1 ? drop : null;
          set({ shelf: [...get().shelf, { ...acquisition, droppedWith }] });
          if (setting !== null) {
            chooseFor(setting, acquisition.id);
            set({ waiting: Object.fromEntries(Object.entries(waiting).filter(([key]) => key !== setting)) });
          }
          added.push(acquisition.id);
        }
        for (const id of added) void look(id, { keepsMap: true });
      },

      lookAgain(id) {
        void look(id, { keepsMap: false });
      },

      changeReading(id, { inspection, ...change }) {
        dropPendingLink();
        patch(id, { ...change, layoutGiven: true, reading: { status: 'read', inspection } });
      },

      remove(id) {
        dropPendingLink();
        const gone = get().shelf.find((a) => a.id === id);
        set(({ shelf }) => ({ shelf: shelf.filter((a) => a.id !== id) }));
        if (gone !== undefined) get().say(`${gone.name} taken off the shelf.`);
      },

      join(ids) {
        dropPendingLink();
        set(({ shelf }) => ({ shelf: joinAcquisitions(shelf, ids) }));
        const joined = get().shelf.find(({ id }) => id === ids[0]);
        if (joined !== undefined)
          get().say(`One acquisition in ${joined.following.length + 1} files from ${joined.name} on.`);
      },

      keepApart(ids) {
        const apart = new Set(ids);
        set(({ shelf }) => ({
          shelf: shelf.map((a) => (apart.has(a.id) ? { ...a, droppedWith: null } : a)),
        }));
      },

      moveFile(id, from, to) {
        dropPendingLink();
        const before = get().shelf.find((a) => a.id === id);
        if (before === undefined) return;
        const after = moveFile(before, from, to);
        patch(id, after);
        // Another file begins it: what was seen was of the other.
        if (after.file !== before.file) void look(id, { keepsMap: true });
      },

      split(id) {
        dropPendingLink();
        const { shelf, added } = splitAcquisition(get().shelf, id, nextId);
        set({ shelf });
        for (const each of added) void look(each, { keepsMap: true });
      },

      changeCompanion(id, companion, fromShelf) {
        dropPendingLink();
        set(({ shelf }) => ({ shelf: shelf.filter((a) => a.id !== fromShelf) }));
        const now = get().shelf.find((a) => a.id === id);
        if (now === undefined) return;
        const before = now.companion;
        patch(id, { companion });
        const seen =
          now.reading.status === 'read' ? jointFacts(now.reading.inspection.facts, companion) : null;
        if (seen !== null && !now.detectorGiven)
          patch(id, { detector: proposeDetector(seen)?.detector ?? null });
        if (companion !== null) get().say(`${companion.name} is the second clock of ${now.name}.`);
        else if (before !== null) get().say(`${before.name} taken off ${now.name}.`);
      },

      assign(input, id) {
        dropPendingLink();
        // One acquisition cannot serve two inputs without being asked to: it leaves the other.
        const before = currentAssignment(get());
        for (const [other, held] of Object.entries(before))
          if (other !== input && id !== null && held === id) chooseFor(other, before[input] ?? null);
        chooseFor(input, id);
      },

      chooseStudy(study) {
        set({ study });
      },

      turn(values) {
        changeDials((history) => turnDials(history, values, Date.now()));
      },

      undo() {
        changeDials(undoDials);
      },

      redo() {
        changeDials(redoDials);
      },

      resetDials() {
        changeDials((history) => replaceDials(history, baseDials(get())));
      },

      openSettings({ study, dials: given, inputs, seed }, ref) {
        set(({ dials, chosen }) => ({
          preset: ref,
          session: null,
          study,
          seed,
          dials: { ...dials, [study]: startHistory(given) },
          chosen: { ...chosen, [study]: {} },
          waiting: inputs,
        }));
        // Acquisitions already on the shelf take the settings of the input they serve.
        const info = currentStudy(get());
        if (info === null) return;
        const taken = new Set<string>();
        for (const [input, id] of Object.entries(currentAssignment(get()))) {
          const setting = inputs[input];
          const acquisition = get().shelf.find((a) => a.id === id);
          if (id === null || setting === undefined || acquisition === undefined) continue;
          patch(id, withSetting(acquisition, setting));
          chooseFor(input, id);
          taken.add(input);
          if (acquisition.file !== null && setting.layout !== null)
            void look(id, { keepsMap: setting.detector !== null });
        }
        set({ waiting: Object.fromEntries(Object.entries(inputs).filter(([key]) => !taken.has(key))) });
      },

      openSession(session, saved) {
        const { studies, studiesProblem } = get();
        set({ ...emptyBench, studies, studiesProblem, session, ...benchOfSession(saved, nextId) });
      },

      clear() {
        set(({ studies, studiesProblem }) => ({ ...emptyBench, studies, studiesProblem }));
      },

      say(text, tone = 'plain') {
        const line = { id: ++counter, at: new Date(), text, tone };
        set(({ log }) => ({ log: [...log, line].slice(-MOST_LOG_LINES) }));
      },
    };
  });
}
