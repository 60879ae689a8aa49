import type { DialValues } from '../../../../shared/contracts/dial';
import type { PairsKept, RunEvent, RunResult } from '../../../../shared/contracts/engine';
import type { StudyOutput } from '../../../../shared/contracts/output';
import type { InputSetting } from '../../../../shared/contracts/preset';
import type { StudyId, StudyInfo } from '../../../../shared/contracts/study';
import type { ProblemData } from '../../../../shared/errors/problem';
import type { Acquisition } from './acquisition';
import type { DialHistory } from './dial-history';
import type { Assignment } from './study-inputs';

export type Progress = Extract<RunEvent, { kind: 'progress' }>;

export type RunState =
  | { status: 'idle' }
  | { status: 'running'; jobId: string; key: string; progress: Progress | null }
  | { status: 'done'; key: string; seconds: number }
  | { status: 'cancelled'; key: string }
  | { status: 'failed'; key: string; problem: ProblemData };

/** What a study found last; never edited in place, so its large arrays are shared and not copied. */
export interface Found {
  output: StudyOutput;
  /** null while the file is still being read, and for a preview. */
  result: RunResult | null;
  /** Where it came from; null while the file is still being read. */
  provenance: RunResult['provenance'] | null;
  /** Answered while a dial was turned, with few resamples; the exact run follows. */
  isPreview: boolean;
  /** Share of the bytes behind a partial output; null when complete. */
  fraction: number | null;
  /** Which inputs and dials it belongs to. */
  key: string;
}

export interface LogLine {
  id: number;
  at: Date;
  text: string;
  tone: 'plain' | 'problem';
}

/** The preset the bench was opened with: where "changed" and "reset" count from. */
export interface PresetRef {
  id: string | null;
  name: string;
  version: number | null;
  study: StudyId;
  dials: DialValues;
  inputs: Record<string, InputSetting>;
}

/** A result in the group's store, found with the inputs and dials of `key`. */
export interface SavedResult {
  id: string;
  /** null in a session just opened, until its acquisitions are here again. */
  key: string | null;
}

export interface SessionRef {
  id: string;
  name: string;
}

export interface BenchState {
  studies: readonly StudyInfo[];
  studiesProblem: ProblemData | null;
  study: StudyId;
  shelf: readonly Acquisition[];
  /** By study: what a person chose. */
  chosen: Partial<Record<StudyId, Assignment>>;
  dials: Partial<Record<StudyId, DialHistory>>;
  /** How the inputs of the study are to be read, for acquisitions still to come. */
  waiting: Record<string, InputSetting>;
  preset: PresetRef | null;
  /** The session the bench was opened from or saved as last. */
  session: SessionRef | null;
  seed: number;
  run: RunState;
  /** By study: what the last whole run kept of its pairs; null where it counted none. */
  pairs: Partial<Record<StudyId, PairsKept | null>>;
  /** Of the last run that read the files; null before one has. */
  bytesPerSecond: number | null;
  found: Partial<Record<StudyId, Found>>;
  saved: Partial<Record<StudyId, SavedResult>>;
  log: readonly LogLine[];
}

export const DEFAULT_SEED = 1;

export const emptyBench: BenchState = {
  studies: [],
  studiesProblem: null,
  study: 'delay',
  shelf: [],
  chosen: {},
  dials: {},
  waiting: {},
  preset: null,
  session: null,
  seed: DEFAULT_SEED,
  run: { status: 'idle' },
  pairs: {},
  bytesPerSecond: null,
  found: {},
  saved: {},
  log: [],
};
