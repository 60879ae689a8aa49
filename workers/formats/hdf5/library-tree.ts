import type { ByteSource, ReaderEnvironment } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import type { NumberType } from '../numbers';
import {
  type H5Dataset,
  type H5Group,
  type H5Metadata,
  type H5Module,
  isH5Dataset,
  isH5Group,
  isH5Module,
} from './library-types';
import {
  absolutePath,
  type DatasetEntry,
  type ElementType,
  type Hdf5Tree,
  type OutsideLink,
  rowBytesOf,
} from './tree';

/** Opens a file by h5wasm, which reads lazily and knows all of HDF5. Throws `unreadable`. */
export async function openLibraryTree(source: ByteSource, environment: ReaderEnvironment): Promise<Hdf5Tree> {
  const library = await environment.openHdf5(source);
  const { file, module } = library;
  if (!isH5Group(file) || !isH5Module(module)) {
    throw new Problem('internal', 'The HDF5 library answered with something else than a file.', source.name);
  }
  const datasets: DatasetEntry[] = [];
  const outside: OutsideLink[] = [];
  try {
    listGroup(file, '', module, datasets, outside, 0);
  } catch (thrown) {
    library.close();
    throw unreadable(`The groups of ${source.name}`, thrown, source.name);
  }
  return {
    reader: 'h5wasm',
    datasets,
    outside,
    attributes: (path, isWanted) => numbersOf(file, absolutePath(path), isWanted),
    readRows: (dataset, start, end, axis) => readRows(file, module, dataset, start, end, axis),
    close: () => library.close(),
  };
}

/** A file with more is walked no further: links may form cycles. */
const mostDatasets = 10_000;
const deepest = 32;

function listGroup(
  group: H5Group,
  path: string,
  module: H5Module,
  datasets: DatasetEntry[],
  outside: OutsideLink[],
  depth: number,
): void {
  for (const name of group.keys()) {
    if (datasets.length >= mostDatasets || depth > deepest) return;
    const childPath = `${path}/${name}`;
    // Asked first: where the other file is at hand, the library would follow the link.
    const { filename } = module.get_external_link(group.file_id, childPath);
    if (filename !== undefined) {
      outside.push({ path: childPath, fileName: filename });
      continue;
    }
    const child = group.get(childPath);
    if (isH5Dataset(child)) datasets.push(entryOf(childPath, child));
    // A soft link to a group shows the same datasets again, or a cycle.
    else if (isH5Group(child) && module.get_symbolic_link(group.file_id, childPath) === null) {
      listGroup(child, childPath, module, datasets, outside, depth + 1);
    }
  }
}

/** Filters up to here are HDF5's own; others are plugins (HDF5 File Format Specification 3.0, IV.A.2.l). */
const lastOwnFilter = 255;

function entryOf(path: string, dataset: H5Dataset): DatasetEntry {
  const { metadata } = dataset;
  const entry = {
    path,
    shape: metadata.shape ?? [],
    type: elementOf(metadata),
    chunkRows: metadata.chunks?.[0] ?? 1,
  };
  const foreign = metadata.virtual_sources?.find(({ file_name }) => file_name !== '.');
  if (foreign) {
    return {
      ...entry,
      refusal: `is put together from other files ("${foreign.file_name}"), which are not read; copy the data into one dataset`,
    };
  }
  const filter = dataset.filters.find(({ id }) => id > lastOwnFilter);
  if (filter) {
    return {
      ...entry,
      refusal: `is packed by the filter ${filter.name || 'number'} (${filter.id}), which is not at hand; save it with gzip`,
    };
  }
  return { ...entry, refusal: null };
}

function elementOf(metadata: H5Metadata): ElementType {
  const { size: bytes, compound_type } = metadata;
  const number = numberOf(metadata);
  if (number !== null) return { kind: 'number', number, bytes };
  if (compound_type === undefined) return { kind: 'other', name: otherName(metadata), bytes };
  const isMixed = hasMixedOrder(metadata);
  const members = compound_type.members.map((member) => ({
    name: member.name,
    offset: member.offset,
    number: numberOf(member),
    isBig: isMixed && !member.littleEndian,
  }));
  return { kind: 'compound', members, bytes };
}

/** Enumerations (booleans among them) count as the integers they are stored as. */
function numberOf({
  type,
  enum_type,
  size,
  signed,
}: Pick<H5Metadata, 'type' | 'enum_type' | 'size' | 'signed'>): NumberType | null {
  const base = type === 8 ? enum_type?.type : type;
  if (base === 0 && [1, 2, 4, 8].includes(size)) return { family: signed ? 'int' : 'uint', bytes: size };
  if (base === 1 && [2, 4, 8].includes(size)) return { family: 'float', bytes: size };
  return null;
}

function otherName({ type, size, vlen }: H5Metadata): string {
  if (type === 3) return vlen ? 'string' : `string${size}`;
  if (type === 9) return 'variable-length';
  if (type === 10) return 'array';
  if (type === 0 || type === 1) return `${type === 0 ? 'integer' : 'float'} of ${size} bytes`;
  return `datatype class ${type}`;
}

/** The library brings rows to little-endian when all members share an order, and leaves them alone when not. */
function hasMixedOrder({ compound_type }: H5Metadata): boolean {
  const wide = (compound_type?.members ?? []).filter(
    (member) => member.size > 1 && numberOf(member) !== null,
  );
  return new Set(wide.map(({ littleEndian }) => littleEndian)).size > 1;
}

function numbersOf(file: H5Group, path: string, isWanted: (name: string) => boolean): [string, number][] {
  const object = path === '/' ? file : file.get(path);
  if (object === null) return [];
  return Object.keys(object.attrs)
    .filter(isWanted)
    .flatMap((name) => {
      const value = object.attrs[name]?.value;
      const single: unknown =
        ArrayBuffer.isView(value) && 'length' in value && value.length === 1
          ? Object.values(value)[0]
          : value;
      return typeof single === 'number' || typeof single === 'bigint'
        ? [[name, Number(single)] as [string, number]]
        : [];
    });
}

function readRows(
  file: H5Group,
  module: H5Module,
  dataset: DatasetEntry,
  start: number,
  end: number,
  axis: 0 | 1 = 0,
): Uint8Array {
  const bytes = rowBytesOf(dataset, axis) * (end - start);
  // Slices outside, or empty ones, ask the library for impossible memory.
  if (bytes === 0) return new Uint8Array(0);
  const pointer = module._malloc(bytes);
  if (pointer === 0) {
    throw new Problem(
      'unreadable',
      `Rows ${start} to ${end} of ${dataset.path} need ${bytes} bytes at once, more than there is; save the dataset in smaller rows.`,
      dataset.path,
    );
  }
  try {
    const status = module.get_dataset_data(
      file.file_id,
      dataset.path,
      dataset.shape.map((size, k) => BigInt(k === axis ? end - start : size)),
      dataset.shape.map((_, k) => BigInt(k === axis ? start : 0)),
      dataset.shape.map(() => 1n),
      BigInt(pointer),
    );
    if (status < 0) throw new Error(`status ${status}`);
    return module.HEAPU8.slice(pointer, pointer + bytes);
  } catch (thrown) {
    throw unreadable(
      `Rows ${start} to ${end} of ${dataset.path}${filtersOf(file, dataset.path)}`,
      thrown,
      dataset.path,
    );
  } finally {
    module._free(pointer);
  }
}

function filtersOf(file: H5Group, path: string): string {
  const object = file.get(path);
  const names = isH5Dataset(object) ? object.filters.map(({ name, id }) => name || `filter ${id}`) : [];
  return names.length > 0 ? ` (filters: ${names.join(', ')})` : '';
}

function unreadable(what: string, thrown: unknown, place: string): Problem {
  return new Problem(
    'unreadable',
    `${what} could not be read: ${lastCause(thrown)}; the file is damaged or needs a filter that is not at hand, copy it again or save it with gzip.`,
    place,
  );
}

/** The innermost of the library's stacked messages: lines such as "#012: …/H5Zdeflate.c line 120 in f(): inflate() failed". */
export function lastCause(thrown: unknown): string {
  const text = thrown instanceof Error ? thrown.message : String(thrown);
  const causes = [...text.matchAll(/#\d+: .*?\(\): (.+)/g)];
  return causes.at(-1)?.[1]?.trim() ?? text.split('\n', 1)[0] ?? text;
}
