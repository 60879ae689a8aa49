import type { ByteSource, CancelToken } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { passTurn } from '../turn';
import { afterLineEnds, countLineEnds } from './line-ends';

/** Lines of a text whose lengths differ: how many, and which lie before every page of the file. */
export interface LineIndex {
  /** Lines of the whole file; what follows the last line end counts when it is not empty. */
  lines: number;
  /** Line ends before byte `page * pageBytes`. */
  endsBefore: Float64Array;
}

export const pageBytes = 2 ** 20;
const pagesARead = 16;
/** A file is opened by every worker, and looked at again with each change of its layout: the last ones are kept. */
const kept: { key: string; size: number; index: LineIndex }[] = [];
const mostKept = 8;

/**
 * Counts the line ends of every page, once for a file whose source has a key. Cost: one pass over the bytes at the
 * speed of reading; 8 bytes of memory a MiB.
 */
export async function indexLines(source: ByteSource, token: CancelToken): Promise<LineIndex> {
  const { size } = source;
  const { key } = source.ref;
  const known = kept.find((entry) => entry.key === key && entry.size === size);
  if (known !== undefined) return known.index;
  const pages = Math.ceil(size / pageBytes);
  const endsBefore = new Float64Array(pages + 1);
  let afterCr = false;
  let last = 0;
  for (let page = 0; page < pages; page += pagesARead) {
    await passTurn(token);
    const from = page * pageBytes;
    const bytes = await readWhole(source, from, Math.min(size, from + pagesARead * pageBytes));
    for (let at = 0, p = page; at < bytes.length; at += pageBytes, p += 1) {
      const part = bytes.subarray(at, Math.min(bytes.length, at + pageBytes));
      endsBefore[p + 1] = endsBefore[p]! + countLineEnds(part, afterCr);
      last = part[part.length - 1]!;
      afterCr = last === 13;
    }
  }
  const isEnded = last === 10 || last === 13;
  const index = { lines: endsBefore[pages]! + (size > 0 && !isEnded ? 1 : 0), endsBefore };
  if (key !== undefined) {
    kept.push({ key, size, index });
    if (kept.length > mostKept) kept.shift();
  }
  return index;
}

/** Byte at which line `line` begins (0 the first); the size of the file for the line after the last. */
export async function findLine(source: ByteSource, index: LineIndex, line: number): Promise<number> {
  if (line === 0) return 0;
  if (line >= index.lines) return source.size;
  let low = 0;
  let high = index.endsBefore.length - 1;
  // The last page with fewer than `line` line ends before it holds the one after which the line begins.
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (index.endsBefore[middle]! < line) low = middle;
    else high = middle;
  }
  const from = low * pageBytes;
  const before = from === 0 ? 0 : 1;
  // One byte more on either side shows a CRLF across the border.
  const bytes = await readWhole(source, from - before, Math.min(source.size, from + pageBytes + 1));
  const at = afterLineEnds(
    bytes.subarray(before),
    line - index.endsBefore[low]!,
    before === 1 && bytes[0] === 13,
  );
  if (at < 0) throw shrunk(source, from + bytes.length);
  return from + at;
}

/** Bytes [from, to), all of them. Throws `truncated`. */
export async function readWhole(source: ByteSource, from: number, to: number): Promise<Uint8Array> {
  const bytes = await source.read(from, to);
  if (bytes.length !== to - from) throw shrunk(source, from + bytes.length);
  return bytes;
}

export function shrunk(source: ByteSource, byte: number): Problem {
  return new Problem(
    'truncated',
    `Expected ${source.size} bytes in ${source.name}, found that they end or change at byte ${byte}; the file was written to while it was read, open it again.`,
    `${source.name}, byte ${byte}`,
  );
}
