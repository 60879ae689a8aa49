import type { ByteSource } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { type ArrayBytes, openEntry, plainBytes } from './array-bytes';
import { type ArrayHeader, assertWhole, hasMagic, isCutMagic, readHeader } from './header';
import { readZipDirectory, type ZipEntry } from './zip-directory';

/** An array whose header was read and whose bytes are there, as far as can be told without unpacking. */
export interface ArrayEntry extends ArrayHeader {
  /** Undefined in an NPY file, which holds one array without a name. */
  name: string | undefined;
  /** For sentences and places. */
  place: string;
  /** Whether to read frames out of order means to unpack again. */
  isStream: boolean;
  /** Bytes after the last element. */
  trailingBytes: number;
  openBytes(): Promise<ArrayBytes>;
}

export type FoundArray = { name: string; array: ArrayEntry } | { name: string; problem: Problem };

const suffix = '.npy';
/** Arrays of an archive that are looked into; more are not proposed, but read when named. */
const mostArrays = 200;

export interface ArrayFile {
  isArchive: boolean;
  /** Every array with its header, or what is wrong with it; `left` more were not looked into. */
  list(): Promise<{ found: FoundArray[]; left: number }>;
  /** Throws `missing-dataset`, `bad-layout`, and what is wrong with the array. */
  find(name: string | undefined): Promise<ArrayEntry>;
}

/** An NPY file, or an NPZ archive of them. */
export async function openArrayFile(source: ByteSource): Promise<ArrayFile> {
  const head = await source.read(0, 8);
  const isArchive = head[0] === 0x50 && head[1] === 0x4b;
  if (isArchive) return openArchive(source);
  if (!hasMagic(head) && head.length < 8 && isCutMagic(head)) {
    throw new Problem(
      'truncated',
      `Expected ${source.name} to hold a header of NumPy, found ${head.length} bytes; it was cut short, copy or save it again.`,
      `${source.name}, byte ${head.length}`,
    );
  }
  const openBytes = async (): Promise<ArrayBytes> => plainBytes(source, 0, source.size, source.name);
  const array = await readArray(undefined, openBytes, source, source.name, false, source.size);
  return {
    isArchive: false,
    list: async () => ({ found: [{ name: '', array }], left: 0 }),
    find: async (name) => {
      if (name === undefined) return array;
      throw new Problem(
        'bad-layout',
        `${source.name} holds one array without a name, but the layout asks for "${name}"; leave the name out.`,
        source.name,
      );
    },
  };
}

async function readArray(
  name: string | undefined,
  openBytes: () => Promise<ArrayBytes>,
  source: { size: number; read(start: number, end: number): Promise<Uint8Array> },
  place: string,
  isStream: boolean,
  size: number,
): Promise<ArrayEntry> {
  const header = await readHeader({ name: place, size, read: source.read });
  assertWhole({ name: place, size, read: source.read }, header);
  const trailingBytes = size - header.dataStart - header.dataBytes;
  return { ...header, name, place, isStream, trailingBytes, openBytes };
}

async function openArchive(source: ByteSource): Promise<ArrayFile> {
  const directory = await readZipDirectory(source);
  const entries = directory.filter((entry) => entry.name.endsWith(suffix));
  if (entries.length === 0) {
    throw new Problem(
      'not-this-format',
      `Expected arrays of NumPy in the archive ${source.name}, found ${directory.length === 0 ? 'nothing' : `"${directory[0]!.name}"`}; unpack it and choose the file inside, or save arrays by numpy.savez.`,
      `${source.name}, byte 0`,
    );
  }
  return {
    isArchive: true,
    list: async () => {
      const found: FoundArray[] = [];
      for (const entry of entries.slice(0, mostArrays)) found.push(await tryEntry(source, entry));
      return { found, left: Math.max(0, entries.length - mostArrays) };
    },
    find: async (name) => {
      const entry = entries.find((each) => nameOf(each) === name);
      if (entry) return readEntry(source, entry);
      throw missing(source.name, name, entries.map(nameOf));
    },
  };
}

function nameOf(entry: ZipEntry): string {
  return entry.name.slice(0, -suffix.length);
}

async function tryEntry(source: ByteSource, entry: ZipEntry): Promise<FoundArray> {
  const name = nameOf(entry);
  try {
    return { name, array: await readEntry(source, entry) };
  } catch (thrown) {
    if (!(thrown instanceof Problem)) throw thrown;
    return { name, problem: thrown };
  }
}

async function readEntry(source: ByteSource, entry: ZipEntry): Promise<ArrayEntry> {
  const bytes = await openEntry(source, entry);
  const never = { cancelled: false };
  const read = (start: number, end: number): Promise<Uint8Array> =>
    bytes.read(Math.min(start, bytes.size), Math.min(end, bytes.size), never);
  const openBytes = (): Promise<ArrayBytes> => openEntry(source, entry);
  return readArray(
    nameOf(entry),
    openBytes,
    { size: bytes.size, read },
    bytes.name,
    bytes.isStream,
    bytes.size,
  );
}

function missing(fileName: string, name: string | undefined, names: readonly string[]): Problem {
  const shown = names.slice(0, 8).join(', ');
  const more = names.length > 8 ? ` and ${names.length - 8} more` : '';
  const asked = name === undefined ? 'The layout names no array' : `There is no array "${name}"`;
  return new Problem(
    'missing-dataset',
    `${asked} of ${fileName}; it holds ${shown}${more}. Point to one of these.`,
    name === undefined ? fileName : `${fileName}, ${name}`,
  );
}
