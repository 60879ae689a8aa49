/** The part of h5wasm that is used, so that both its builds fit. */
export interface H5Module {
  readonly HEAPU8: Uint8Array;
  _malloc(bytes: number): number;
  _free(pointer: number): void;
  get_dataset_data(
    fileId: bigint,
    path: string,
    count: bigint[],
    offset: bigint[],
    strides: bigint[],
    pointer: bigint,
  ): number;
  /** Target of a soft link, null for anything else. */
  get_symbolic_link(fileId: bigint, path: string): string | null;
  /** An empty object for anything but an external link. */
  get_external_link(fileId: bigint, path: string): { filename?: string };
}

export interface H5Metadata {
  /** Datatype class: 0 integer, 1 float, 3 string, 6 compound, 8 enumeration, 10 array. */
  type: number;
  size: number;
  signed: boolean;
  littleEndian: boolean;
  vlen: boolean;
  shape: number[] | null;
  chunks: number[] | null;
  enum_type?: { type: number };
  compound_type?: { members: (Omit<H5Metadata, 'shape' | 'chunks'> & { name: string; offset: number })[] };
  virtual_sources?: { file_name: string; dset_name: string }[];
}

export interface H5Object {
  type: string;
  path: string;
  attrs: Record<string, { value: unknown }>;
}

export interface H5Group extends H5Object {
  file_id: bigint;
  keys(): string[];
  get(path: string): H5Object | null;
}

export interface H5Dataset extends H5Object {
  metadata: H5Metadata;
  filters: { id: number; name: string }[];
}

export function isH5Group(value: unknown): value is H5Group {
  return hasAll(value, ['file_id', 'keys', 'get']);
}

export function isH5Module(value: unknown): value is H5Module {
  return hasAll(value, ['HEAPU8', '_malloc', '_free', 'get_dataset_data']);
}

/** By the `type` of the object: the classes are renamed in minified builds. */
export function isH5Dataset(object: H5Object | null): object is H5Dataset {
  return object?.type === 'Dataset';
}

function hasAll(value: unknown, keys: readonly string[]): boolean {
  return typeof value === 'object' && value !== null && keys.every((key) => key in value);
}
