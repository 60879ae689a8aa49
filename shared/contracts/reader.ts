import type { Block } from './blocks';
import type { Inspection, SourceRef } from './engine';
import type { BitField, FormatId, Layout } from './layout';

/**
 * A file seen as bytes: sized, read by slices, never as a whole. `path` and `file` let a reader hand the source to a
 * library that wants the thing itself (HDF5).
 */
export interface ByteSource {
  readonly name: string;
  readonly size: number;
  readonly ref: SourceRef;
  /**
   * Bytes [start, end); end past the size is clipped. A source may fill `into`, where it is long enough, and answer a
   * view of it: reading into the same memory again and again is quicker.
   */
  read(start: number, end: number, into?: Uint8Array): Promise<Uint8Array>;
  close(): Promise<void>;
}

/** Polled at every block; cancelling is a flag, because an AbortSignal cannot cross to a worker. */
export interface CancelToken {
  readonly cancelled: boolean;
}

/** Record or frame indices [start, end) of the acquisition. */
export interface ReadRange {
  start: number;
  end: number;
}

export type ReaderFacts =
  | { kind: 'tags'; records: number; tickFs: number; reader: string }
  | { kind: 'frames'; frames: number; width: number; height: number; type: string; reader: string };

/** One opened file. Reads whole ranges in blocks, in bounded memory. */
export interface Reader {
  readonly facts: ReaderFacts;
  /**
   * Ticks to add to the times of a range that starts at `start`, so that ranges can be read apart: rollovers counted
   * before it. Readers whose times are absolute answer 0n at once. `onBytes` reports progress.
   */
  tickOffsetAt(start: number, token: CancelToken, onBytes?: (bytes: number) => void): Promise<bigint>;
  /**
   * Rollovers inside the range, in ticks: what `tickOffsetAt` rises by. The bytes stay at hand for a `read` of the same
   * range, which is not longer than a chunk. Left out where times are absolute.
   */
  advanceOf?(range: ReadRange, token: CancelToken): Promise<bigint>;
  read(range: ReadRange, tickOffset: bigint, token: CancelToken): AsyncIterable<Block>;
  close(): Promise<void>;
}

/** What formats need from the platform: HDF5 has one build for the browser and one for Node. */
export interface ReaderEnvironment {
  openHdf5(source: ByteSource): Promise<Hdf5Library>;
  /** Compiled decoding of records. With it the columns of a block end when the next one is asked for. */
  records?: RecordDecoding;
}

/** Records as integers of `recordBytes` bytes; bit 0 is the least significant. */
export interface RecordRules {
  /** 1 to 8. */
  recordBytes: number;
  bigEndian: boolean;
  /** At most 52 bits. */
  time: BitField;
  /** At most 16 bits. */
  channel: BitField;
  /** `counted`: a marker whose time field says how many rollovers it stands for. */
  rollover: 'none' | 'wrap' | 'marker' | 'counted';
  /** Ticks of one rollover. */
  advanceTick: number;
  /** Records that yield no tag: those with (record & mask) == value. The marker first, where there is one. */
  odd: readonly { mask: bigint; value: bigint }[];
}

export interface RecordDecoding {
  /** null while another reading has the room. */
  open(rules: RecordRules): RecordDecoder | null;
}

/** Where decoding stands between two calls. */
export interface RecordState {
  /** Ticks of the rollovers so far, added to every time; at most 2^52. */
  epochTick: number;
  /** Time field of the last tag, where the time field wraps; -1 when there is none. */
  previousTick: number;
}

export interface RecordDecoder {
  /** Most records a call. */
  readonly capacity: number;
  /**
   * Decodes whole records and brings `state` up to date. Stops before a record whose rollover would take the epoch past
   * 2^52: `records` says how many were taken. The columns end with the next call.
   */
  decode(
    bytes: Uint8Array,
    state: RecordState,
  ): { records: number; deltaTick: Float64Array; channel: Uint16Array };
  close(): void;
}

/** The little of h5wasm that the reader uses, so that both builds fit. */
export interface Hdf5Library {
  /** Opened root group/file object of h5wasm; narrowed inside the hdf5 format. */
  file: unknown;
  /** The WASM module behind it: rows are read as raw bytes, which the objects of h5wasm do not offer. */
  module: unknown;
  close(): void;
}

export interface Format {
  id: FormatId;
  /** 0..1 from the first bytes (up to 64 KiB): 1 certain, 0 impossible. The name never outweighs the bytes. */
  sniff(head: Uint8Array, source: { name: string; size: number }): number;
  inspect(source: ByteSource, layout: Layout | null, environment: ReaderEnvironment): Promise<Inspection>;
  open(source: ByteSource, layout: Layout, environment: ReaderEnvironment): Promise<Reader>;
}
