import type { Inspection, SourceRef } from '../../shared/contracts/engine';
import type { Layout } from '../../shared/contracts/layout';
import type { Outcome } from '../../shared/contracts/outcome';
import type { ReaderFacts, ReadRange } from '../../shared/contracts/reader';
import type { TallySpec } from '../../shared/contracts/tally';
import type { Part } from '../accumulators/accumulator';
import type { ClockFacts } from '../studies/study';
import type { ReadInput } from './read-input';

/**
 * What one worker does for the engine: small tasks that answer with plain data. The engine decides what to do; compute
 * workers know nothing of studies or jobs.
 */
export interface CountTask {
  taskId: string;
  input: ReadInput;
  spec: TallySpec;
  range: ReadRange;
  /** Slices of time are at least 2^leastBits ticks long: what the parts before it came to. */
  leastBits: number;
}

export interface TaskProgress {
  /** Since the last report of the same task. */
  bytes: number;
  records: number;
}
export type OnTaskProgress = (progress: TaskProgress) => void;
/** Tells the rollovers inside a chunk and hears the ticks of those before it; null when the run has ended. */
export type AskOffset = (advanceTick: bigint) => Promise<bigint | null>;

export interface ComputeHost {
  inspect(source: SourceRef, layout: Layout | null): Promise<Outcome<Inspection>>;
  facts(input: ReadInput): Promise<Outcome<ReaderFacts>>;
  /** Without `askOffset` the rollovers before the chunk are found by reading what comes before it. */
  count(task: CountTask, onProgress: OnTaskProgress, askOffset?: AskOffset): Promise<Outcome<Part>>;
  /** The clock of the companion against the main one. */
  findClock(taskId: string, input: ReadInput, onProgress: OnTaskProgress): Promise<Outcome<ClockFacts>>;
  /** SHA-256 of the whole source, lower-case hexadecimal. */
  fingerprint(taskId: string, source: SourceRef, onProgress: OnTaskProgress): Promise<Outcome<string>>;
  /** Unknown tasks are ignored: they may have ended meanwhile. */
  cancel(taskId: string): Promise<void>;
}
