import type { Detector } from './detector';
import type { DialValues } from './dial';
import type { Layout } from './layout';
import type { Outcome } from './outcome';
import type { StudyOutput } from './output';
import type { Plane } from './plane';
import type { StudyId, StudyInfo } from './study';

/**
 * The part of `Blob` the engine uses: a browser File fits, and so does a file handle wrapped for Node.
 * `shared` knows neither.
 */
export interface SliceableBytes {
  readonly size: number;
  slice(start: number, end: number): { arrayBuffer(): Promise<ArrayBuffer> };
}

/** Where bytes come from. Exactly one of `file` (browser) and `path` (Node) is set. */
export interface SourceRef {
  name: string;
  size: number;
  file?: SliceableBytes;
  path?: string;
  /**
   * The same key means the same bytes as long as the engine runs: counts and opened readers are then used again. Without
   * one nothing is.
   */
  key?: string;
}

/** A second file of the same acquisition, written by a tagger whose clock runs on its own. */
export interface Companion {
  source: SourceRef;
  layout: Layout;
  /** Added to its channels, so that one detector map names the channels of both files. */
  channelOffset: number;
  /**
   * Its clock against that of the main file: t_main = t_companion * (1 + drift) + offsetPs. null: found by
   * cross-correlation before counting.
   */
  clock: { offsetPs: number; drift: number } | null;
}

export interface RunInput {
  source: SourceRef;
  /**
   * Files that go on where `source` ends, in this order: one acquisition in several files of one layout. Left out or
   * empty: a single file.
   */
  following?: readonly SourceRef[];
  companion?: Companion;
  layout: Layout;
  detector: Detector;
  plane: Plane | null;
}

export interface RunRequest {
  jobId: string;
  study: StudyId;
  inputs: Record<string, RunInput>;
  dials: DialValues;
  seed: number;
  /**
   * A look while a dial is turned: answered at once from what is at hand, with few resamples, as a look while reading
   * is. Where bytes would have to be read the answer is a problem `needs-bytes`.
   */
  quick?: boolean;
  /** False where nobody would see a partial answer: finishing one costs up to a tenth of the reading. Left out: true. */
  looks?: boolean;
}

/** One entry a file: the files of a sequence follow each other under one name, a companion comes last. */
export interface InputProvenance {
  name: string;
  fileName: string;
  sha256: string;
  bytes: number;
  layout: Layout;
  detector: Detector;
  plane: Plane | null;
  /** Of a second file on a clock of its own: what was added to its channels, and the clock its times were read by. */
  second?: { channelOffset: number; offsetPs: number; drift: number };
}

/** Pairs at hand after a run of time tags: dials that need pairs are then answered without the bytes. Or why not. */
export type PairsKept = { kept: number; bytes: number } | { kept: null; why: string };

export interface EngineOptions {
  /** Memory for kept pairs; 0 keeps none. Left out: 512 MiB. */
  pairBytes?: number;
}

export interface RunResult {
  output: StudyOutput;
  /** Of all its inputs of time tags together; left out when there are none. */
  pairs?: PairsKept;
  provenance: {
    inputs: InputProvenance[];
    dials: DialValues;
    engine: string;
    seed: number;
    startedAt: string;
    seconds: number;
  };
}

export type RunEvent =
  | {
      kind: 'progress';
      jobId: string;
      /** What is going on, in words: "near: finding the delay", "near: reading". */
      stage: string;
      bytesDone: number;
      bytesTotal: number;
      /** What `recordsDone` and `recordsPerSecond` count. */
      counted: 'records' | 'frames';
      recordsDone: number;
      recordsPerSecond: number;
      secondsLeft: number | null;
    }
  /** A look at the accumulators while they fill: same shape as the final output, fewer bootstrap resamples. */
  | { kind: 'partial'; jobId: string; output: StudyOutput; fraction: number };

/** What the bytes of a file look like, before any study. */
export interface Inspection {
  fileName: string;
  bytes: number;
  /** Proposed layout, null when nothing fits and the person must describe the bytes. */
  layout: Layout | null;
  /** Why this layout: one sentence. */
  because: string;
  /** What looks wrong, in sentences. */
  warnings: string[];
  /** Which reader reads it ("jsfive", "h5wasm", "records"). */
  reader: string;
  facts: InspectionFacts;
  /** Every dataset of an HDF5 file, so that the person can point elsewhere. */
  datasets: DatasetFact[];
}

export interface DatasetFact {
  path: string;
  shape: number[];
  /** "uint64", "int16", "float32", "compound{time:uint64,channel:uint16}". */
  type: string;
  /** Compound member names, else empty. */
  fields: string[];
}

export type InspectionFacts =
  | {
      kind: 'tags';
      records: number;
      /** First tags decoded: absolute tick as decimal text (may pass 2^53) and channel. */
      first: { tick: string; channel: number }[];
      /** Over the sampled part. */
      channels: { channel: number; count: number }[];
      sampled: number;
      /** Span of the sampled part, seconds. */
      sampledSeconds: number;
    }
  | {
      kind: 'frames';
      frames: number;
      width: number;
      height: number;
      type: string;
      mean: number;
      max: number;
      sampled: number;
    }
  | { kind: 'none' };

/** Told by comlink proxy in the page and by a plain function in Node. */
export type OnRunEvent = (event: RunEvent) => void | Promise<void>;

export interface Engine {
  inspect(source: SourceRef, layout: Layout | null): Promise<Outcome<Inspection>>;
  run(request: RunRequest, onEvent: OnRunEvent): Promise<Outcome<RunResult>>;
  cancel(jobId: string): Promise<void>;
}

/**
 * What the coordinating worker of the page exposes: the engine, plus the doors to its compute workers (MessagePorts,
 * transferred; `shared` has no DOM and so no name for them) and the list of studies.
 */
export interface EngineHost extends Engine {
  attach(ports: readonly unknown[], options?: EngineOptions): Promise<void>;
  studies(): Promise<StudyInfo[]>;
}
