import { type NumberType, numberName } from '../numbers';

/** What both HDF5 readers make of a file: a flat list of datasets whose rows can be read as little-endian bytes. */
export interface Hdf5Tree {
  reader: 'jsfive' | 'h5wasm';
  datasets: readonly DatasetEntry[];
  /** Links that lead out of the file; never followed. */
  outside: readonly OutsideLink[];
  /** Numbers among the attributes of a dataset, group or the file ("/"), by name, of those names that are wanted. */
  attributes(path: string, isWanted: (name: string) => boolean): [name: string, value: number][];
  /**
   * Rows [start, end) of the first dimension, or of the given one where those before have length 1; packed, and
   * little-endian but for members that say otherwise. Throws `unreadable`.
   */
  readRows(dataset: DatasetEntry, start: number, end: number, axis?: 0 | 1): Uint8Array;
  close(): void;
}

export interface OutsideLink {
  path: string;
  fileName: string;
}

export interface DatasetEntry {
  /** From the root, with a leading slash. */
  path: string;
  shape: number[];
  type: ElementType;
  /** Rows of a stored chunk; 1 when not chunked. */
  chunkRows: number;
  /** Why it is not read, as the rest of a sentence that begins with its path; null when it can be. */
  refusal: string | null;
}

export type ElementType =
  | { kind: 'number'; number: NumberType; bytes: number }
  | { kind: 'compound'; members: Member[]; bytes: number }
  | { kind: 'other'; name: string; bytes: number };

export interface Member {
  name: string;
  offset: number;
  /** Null when the member is no plain number. */
  number: NumberType | null;
  /** Left most significant byte first, because other members are not. */
  isBig: boolean;
}

export function typeName(type: ElementType): string {
  if (type.kind === 'number') return numberName(type.number);
  if (type.kind === 'other') return type.name;
  const members = type.members.map(({ name, number }) => `${name}:${number ? numberName(number) : 'other'}`);
  return `compound{${members.join(',')}}`;
}

export function rowBytesOf({ shape, type }: DatasetEntry, axis: 0 | 1 = 0): number {
  return shape.slice(axis + 1).reduce((product, size) => product * size, type.bytes);
}

export function absolutePath(path: string): string {
  return `/${path.split('/').filter(Boolean).join('/')}`;
}
