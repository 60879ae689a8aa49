import type { Block } from './blocks';
import type { Inspection, SourceRef } from './engine';
import type { FormatId, Layout } from './layout';

/**
 * A file seen as bytes: sized, read by slices, never as a whole. `path` and `file` let a reader hand the source to a
 * library that wants the thing itself (HDF5).
 */
export interface ByteSource {
  readonly name: string;
  readonly size: number;
  readonly ref: SourceRef;
  /** Bytes [start, end); end past the size is clipped. */
  read(start: number, end: number): Promise<Uint8Array>;
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
  read(range: ReadRange, tickOffset: bigint, token: CancelToken): AsyncIterable<Block>;
  close(): Promise<void>;
}

/** What formats need from the platform: HDF5 has one build for the browser and one for Node. */
export interface ReaderEnvironment {
  openHdf5(source: ByteSource): Promise<Hdf5Library>;
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
