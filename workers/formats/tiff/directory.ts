import { Problem } from '../../../shared/errors/problem';

/**
 * TIFF 6.0 (Adobe, 1992) and its 64-bit sibling BigTIFF: where things lie in an image file directory.
 */
export interface TiffShape {
  isLittle: boolean;
  isBig: boolean;
  firstDirectory: number;
}

/** One entry: `count` values of a type, in the entry itself where they fit, else elsewhere in the file. */
export interface TiffEntry {
  tag: number;
  type: number;
  count: number;
  /** Where the values start in the file. */
  at: number;
}

export interface TiffDirectory {
  /** Index of the page, for sentences. */
  page: number;
  at: number;
  /** Bytes of the directory, from its count to its link. */
  bytes: Uint8Array;
  next: number;
}

/** Directories of pictures have some twenty entries; more than this are no directory. */
export const mostEntries = 4096;

export function entryBytesOf({ isBig }: TiffShape): { count: number; entry: number; link: number } {
  return isBig ? { count: 8, entry: 20, link: 8 } : { count: 2, entry: 12, link: 4 };
}

/** Byte order, kind and first directory, or null when the bytes are no TIFF. */
export function parseTiffHead(head: Uint8Array): TiffShape | null {
  if (head.length < 8) return null;
  const isLittle = head[0] === 0x49 && head[1] === 0x49;
  if (!isLittle && !(head[0] === 0x4d && head[1] === 0x4d)) return null;
  const view = new DataView(head.buffer, head.byteOffset, head.length);
  const version = view.getUint16(2, isLittle);
  if (version === 42) return { isLittle, isBig: false, firstDirectory: view.getUint32(4, isLittle) };
  const isBig =
    version === 43 && head.length >= 16 && view.getUint32(4, isLittle) === (isLittle ? 8 : 0x80000);
  return isBig ? { isLittle, isBig, firstDirectory: Number(view.getBigUint64(8, isLittle)) } : null;
}

/** Whether a file cut within its head began as a TIFF. */
export function isCutTiffHead(head: Uint8Array): boolean {
  const starts = [
    [0x49, 0x49, 0x2a, 0],
    [0x4d, 0x4d, 0, 0x2a],
    [0x49, 0x49, 0x2b, 0],
    [0x4d, 0x4d, 0, 0x2b],
  ];
  const isStart = starts.some((start) => start.every((byte, k) => head[k] === byte));
  return isStart && head.length < 16;
}

export function viewOf(bytes: Uint8Array): DataView {
  return new DataView(bytes.buffer, bytes.byteOffset, bytes.length);
}

/** A count, offset or size as the kind of file stores it. */
export function readWord(view: DataView, at: number, { isBig, isLittle }: TiffShape): number {
  return isBig ? Number(view.getBigUint64(at, isLittle)) : view.getUint32(at, isLittle);
}

export function readCount(view: DataView, { isBig, isLittle }: TiffShape): number {
  return isBig ? Number(view.getBigUint64(0, isLittle)) : view.getUint16(0, isLittle);
}

/** The entry of a tag, or null. */
export function findEntry(shape: TiffShape, directory: TiffDirectory, tag: number): TiffEntry | null {
  const sizes = entryBytesOf(shape);
  const view = viewOf(directory.bytes);
  const end = directory.bytes.length - sizes.link;
  for (let at = sizes.count; at < end; at += sizes.entry) {
    if (view.getUint16(at, shape.isLittle) !== tag) continue;
    const type = view.getUint16(at + 2, shape.isLittle);
    const count = readWord(view, at + 4, shape);
    const valueAt = at + (shape.isBig ? 12 : 8);
    const fits = count * (valueBytes[type] ?? 1) <= (shape.isBig ? 8 : 4);
    return { tag, type, count, at: fits ? directory.at + valueAt : readWord(view, valueAt, shape) };
  }
  return null;
}

/** Bytes of a value by type: byte, ascii, short, long, rational, their signed kinds, floats, and those of BigTIFF. */
export const valueBytes: Record<number, number> = {
  1: 1,
  2: 1,
  3: 2,
  4: 4,
  5: 8,
  6: 1,
  7: 1,
  8: 2,
  9: 4,
  10: 8,
  11: 4,
  12: 8,
  13: 4,
  16: 8,
  17: 8,
  18: 8,
};

/** Whole numbers of an entry from its bytes. Throws `unreadable` when the type has none. */
export function decodeWhole(bytes: Uint8Array, type: number, isLittle: boolean, place: string): Float64Array {
  const view = viewOf(bytes);
  const size = valueBytes[type] ?? 0;
  const values = new Float64Array(size === 0 ? 0 : Math.floor(bytes.length / size));
  for (let i = 0; i < values.length; i += 1) {
    if (type === 1) values[i] = bytes[i]!;
    else if (type === 3) values[i] = view.getUint16(2 * i, isLittle);
    else if (type === 4 || type === 13) values[i] = view.getUint32(4 * i, isLittle);
    else if (type === 16 || type === 18) values[i] = Number(view.getBigUint64(8 * i, isLittle));
    else {
      throw new Problem(
        'unreadable',
        `Expected whole numbers in the directory of ${place}, found type ${type}; the file is damaged, save it again.`,
        place,
      );
    }
  }
  return values;
}
