/// <reference path="./jsfive.d.ts" />
import type { Dataset, File, Group } from 'jsfive';
import type { ByteSource } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import type { NumberType } from '../numbers';
import { type ProvenDataset, proveDataset } from './classic-proof';
import type { Superblock } from './superblock';
import { absolutePath, type DatasetEntry, type Hdf5Tree, rowBytesOf } from './tree';

/** Read whole into memory, so small ones only. */
const mostBytes = 32 * 2 ** 20;

/**
 * Opens a file by jsfive, which is light and quick to load, when every header proves that it reads the file exactly;
 * null otherwise. jsfive throws strings and plain errors for all it does not know: any of them means "not this way".
 */
export async function openClassicTree(source: ByteSource, superblock: Superblock): Promise<Hdf5Tree | null> {
  if (superblock.version !== 0 || superblock.at !== 0 || source.size > mostBytes) return null;
  const bytes = await source.read(0, source.size);
  if (bytes.length !== source.size) return null;
  const buffer = bytes.byteLength === bytes.buffer.byteLength ? bytes.buffer : bytes.slice().buffer;
  const jsfive = await import('jsfive');
  try {
    const file = new jsfive.File(buffer, source.name);
    const found = new Map<string, { dataset: Dataset; proven: ProvenDataset }>();
    if (!proveGroup(file, '', new DataView(buffer), found, 0)) return null;
    const datasets = [...found].map(([path, { dataset, proven }]) => toEntry(path, dataset, proven));
    return treeOf(file, datasets);
  } catch {
    // The full library has the last word on such files, and says what is wrong with them.
    return null;
  }
}

const deepest = 32;

function proveGroup(
  group: Group,
  path: string,
  file: DataView,
  found: Map<string, { dataset: Dataset; proven: ProvenDataset }>,
  depth: number,
): boolean {
  if (depth > deepest || group._dataobjects._header.get('version') !== 1) return false;
  // Attributes that jsfive cannot parse throw here, while there is still another way.
  void group.attrs;
  for (const [name, target] of Object.entries(group._links)) {
    // Soft links and the like are left to the full library.
    if (typeof target !== 'number') return false;
    const child = group.get(name);
    if (child === null) return false;
    if (isGroup(child)) {
      if (!proveGroup(child, `${path}/${name}`, file, found, depth + 1)) return false;
      continue;
    }
    void child.attrs;
    const proven = proveDataset(child, file);
    if (proven === null) return false;
    found.set(`${path}/${name}`, { dataset: child, proven });
  }
  return true;
}

function isGroup(child: Group | Dataset): child is Group {
  return !child._dataobjects.is_dataset;
}

type ClassicEntry = DatasetEntry & { source: Dataset; number: NumberType };

function toEntry(path: string, dataset: Dataset, { shape, number, chunkRows }: ProvenDataset): ClassicEntry {
  const type = { kind: 'number', number, bytes: number.bytes } as const;
  return { path, shape, type, chunkRows, refusal: null, source: dataset, number };
}

function treeOf(file: File, datasets: ClassicEntry[]): Hdf5Tree {
  const values = new Map<string, Uint8Array>();
  return {
    reader: 'jsfive',
    datasets,
    outside: [],
    attributes: (path, isWanted) => {
      const object = absolutePath(path) === '/' ? file : file.get(absolutePath(path));
      return Object.entries(object?.attrs ?? {}).flatMap(([name, value]) => {
        const single: unknown = Array.isArray(value) && value.length === 1 ? value[0] : value;
        return isWanted(name) && typeof single === 'number' ? [[name, single] as [string, number]] : [];
      });
    },
    readRows: (entry, start, end, axis) => {
      const known = datasets.find(({ path }) => path === entry.path)!;
      const bytes = values.get(entry.path) ?? readAll(known);
      values.set(entry.path, bytes);
      const rowBytes = rowBytesOf(entry, axis);
      return bytes.slice(start * rowBytes, end * rowBytes);
    },
    close: () => values.clear(),
  };
}

function readAll({ path, source, number }: ClassicEntry): Uint8Array {
  try {
    return pack(source.value, number);
  } catch (thrown) {
    const detail = thrown instanceof Error ? thrown.message : String(thrown);
    throw new Problem(
      'unreadable',
      `Dataset ${path} could not be read (${detail}); its bytes are damaged, copy the file again from where it was written.`,
      path,
    );
  }
}

function pack(values: readonly number[], { family, bytes }: NumberType): Uint8Array {
  const packed =
    family === 'float'
      ? bytes === 4
        ? Float32Array.from(values)
        : Float64Array.from(values)
      : family === 'int'
        ? bytes === 1
          ? Int8Array.from(values)
          : bytes === 2
            ? Int16Array.from(values)
            : Int32Array.from(values)
        : bytes === 1
          ? Uint8Array.from(values)
          : bytes === 2
            ? Uint16Array.from(values)
            : Uint32Array.from(values);
  return new Uint8Array(packed.buffer);
}
