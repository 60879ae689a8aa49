import type { ByteSource } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import {
  entryBytesOf,
  mostEntries,
  readCount,
  readWord,
  type TiffDirectory,
  type TiffShape,
  viewOf,
} from './directory';
import { createWindow, type FileWindow } from './window';

/** Pages of one file; a stack of small frames has some hundred thousand. */
const mostPages = 2 ** 24;
/** Directories guessed ahead at once. */
const guessed = 64;
/** Directories this near to each other are read together. */
const nearBytes = 2 ** 14;
const aheadBytes = 2 ** 20;
const loneBytes = 2 ** 10;

/**
 * Every directory of the file in the order of the chain, each told to `visit` while its bytes are there. The chain must
 * be walked to its end to know how many pages there are. Where directories follow each other at one distance the next
 * ones are guessed, read together, and each link is compared with the guess. A chain that comes back to itself is found
 * by Brent's method (BIT 20, 1980): the link is compared with one page kept from before, which moves on at powers of two.
 * Throws `truncated` and `unreadable`.
 */
export async function walkPages(
  source: ByteSource,
  shape: TiffShape,
  visit: (directory: TiffDirectory) => void,
): Promise<number> {
  const window = createWindow(source);
  let page = 0;
  let at = shape.firstDirectory;
  let before = 0;
  let kept = 0;
  let nextKept = 1;

  function take(directory: TiffDirectory): void {
    visit(directory);
    page += 1;
    before = directory.at;
    at = directory.next;
    if (at !== 0 && (at === kept || at === before || page >= mostPages)) {
      throw damaged(source, directory, 'a chain of pages that comes back to itself');
    }
    if (page === nextKept) {
      kept = before;
      nextKept *= 2;
    }
  }

  while (at !== 0) {
    const step = at - before;
    const isRegular = page >= 2 && step > 0;
    const isNear = step > 0 && step <= nearBytes;
    const directory = await readDirectory(source, shape, window, page, at, isNear ? aheadBytes : loneBytes);
    take(directory);
    if (!isRegular || isNear || at - before !== step) continue;
    for (const guess of await guessAhead(source, shape, page, before, step, directory.bytes.length)) {
      if (guess.at !== at || !isWhole(shape, guess)) break;
      guess.page = page;
      take(guess);
    }
  }
  if (page === 0) {
    throw new Problem(
      'unreadable',
      `Expected a page in ${source.name}, found none; save the frames again.`,
      `${source.name}, byte ${shape.isBig ? 8 : 4}`,
    );
  }
  return page;
}

async function guessAhead(
  source: ByteSource,
  shape: TiffShape,
  page: number,
  before: number,
  step: number,
  length: number,
): Promise<TiffDirectory[]> {
  const places = Array.from({ length: guessed }, (_, k) => before + (k + 1) * step).filter(
    (start) => start + length <= source.size,
  );
  const read = await Promise.all(places.map((start) => source.read(start, start + length)));
  const { link } = entryBytesOf(shape);
  return read.map((bytes, k) => ({
    page,
    at: places[k]!,
    bytes,
    next: bytes.length === length ? readWord(viewOf(bytes), length - link, shape) : 0,
  }));
}

/** Whether a guess has as many entries as the bytes read for it. */
function isWhole(shape: TiffShape, { bytes }: TiffDirectory): boolean {
  const sizes = entryBytesOf(shape);
  if (bytes.length < sizes.count) return false;
  return sizes.count + readCount(viewOf(bytes), shape) * sizes.entry + sizes.link === bytes.length;
}

async function readDirectory(
  source: ByteSource,
  shape: TiffShape,
  window: FileWindow,
  page: number,
  at: number,
  ahead: number,
): Promise<TiffDirectory> {
  const sizes = entryBytesOf(shape);
  const place = { page, at };
  if (at + sizes.count > source.size) throw cut(source, place);
  const entries = readCount(viewOf(await window.read(at, at + sizes.count, ahead)), shape);
  if (entries === 0 || entries > mostEntries) {
    throw damaged(source, place, `a directory of ${entries} entries`);
  }
  const length = sizes.count + entries * sizes.entry + sizes.link;
  if (at + length > source.size) throw cut(source, place);
  const bytes = (await window.read(at, at + length, ahead)).slice();
  if (bytes.length < length) throw cut(source, place);
  return { page, at, bytes, next: readWord(viewOf(bytes), length - sizes.link, shape) };
}

function cut({ name, size }: ByteSource, { page, at }: { page: number; at: number }): Problem {
  return new Problem(
    'truncated',
    `Expected page ${page} of ${name} at byte ${at}, found only ${size} bytes; it was cut short or its writing was not finished, copy or save it again.`,
    `${name}, page ${page}, byte ${size}`,
  );
}

function damaged({ name }: ByteSource, { page, at }: { page: number; at: number }, found: string): Problem {
  return new Problem(
    'unreadable',
    `Expected the pages of ${name}, found ${found} at page ${page}; the file is damaged, save the frames again.`,
    `${name}, page ${page}, byte ${at}`,
  );
}
