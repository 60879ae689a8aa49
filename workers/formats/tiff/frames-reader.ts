import type { FrameBlock } from '../../../shared/contracts/blocks';
import type { ByteSource, CancelToken, Reader, ReadRange } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { numberName, viewPixels } from '../numbers';
import { assertRange, bytesOfRange } from '../ranges';
import { passTurn } from '../turn';
import { countDescribed } from './described-stack';
import { isCutTiffHead, parseTiffHead, type TiffShape } from './directory';
import { indexPages, type PageIndex } from './page-index';
import { type PageParts, readParts } from './parts';
import { readPages } from './read-pages';

/** Bytes of frames a block; at least one frame. */
const mostBytes = 2 ** 23;
/** Lists of parts read side by side. */
const pagesAtOnce = 64;

export interface OpenTiff {
  reader: Reader;
  index: PageIndex;
  isBig: boolean;
}

/** The pages of a TIFF or BigTIFF file as frames. The pages are walked at once, what is on them is read when asked for. */
export async function openTiff(source: ByteSource): Promise<OpenTiff> {
  const head = await source.read(0, 16);
  const shape = parseTiffHead(head);
  if (shape === null) throw noTiff(source, head);
  const index = await indexPages(source, shape);
  const { geometry } = index;
  const frames = index.pages === 1 ? await countDescribed(source, shape, index) : index.pages;
  const { width, height, number } = geometry;
  const isDescribed = frames > index.pages;
  const partsOf = (first: number, end: number): Promise<PageParts[]> =>
    isDescribed
      ? Promise.resolve(describedParts(index, first, end))
      : listedParts(source, shape, index, first, end);
  const reader: Reader = {
    facts: { kind: 'frames', frames, width, height, type: numberName(number), reader: 'tiff' },
    tickOffsetAt: async () => 0n,
    read: (range, _tickOffset, token) =>
      readFrames(source, index, frames, partsOf, assertRange(range, frames, 'frames', source.name), token),
    close: () => source.close(),
  };
  return { reader, index, isBig: shape.isBig };
}

function noTiff({ name }: ByteSource, head: Uint8Array): Problem {
  if (isCutTiffHead(head)) {
    return new Problem(
      'truncated',
      `Expected ${name} to hold the head of a TIFF file, found ${head.length} bytes; it was cut short, copy or save it again.`,
      `${name}, byte ${head.length}`,
    );
  }
  return new Problem(
    'not-this-format',
    `Expected a TIFF file in ${name}, found other bytes; choose a TIFF file or another layout.`,
    `${name}, byte 0`,
  );
}

async function* readFrames(
  source: ByteSource,
  { geometry }: PageIndex,
  frames: number,
  partsOf: (first: number, end: number) => Promise<PageParts[]>,
  range: ReadRange,
  token: CancelToken,
): AsyncGenerator<FrameBlock> {
  const { width, height, number, frameBytes } = geometry;
  const rows = Math.max(1, Math.floor(mostBytes / frameBytes));
  for (let first = range.start; first < range.end; first += rows) {
    await passTurn(token);
    const end = Math.min(first + rows, range.end);
    const bytes = await readPages(source, geometry, await partsOf(first, end), token);
    yield {
      kind: 'frames',
      firstFrame: first,
      count: end - first,
      width,
      height,
      pixels: viewPixels(bytes, number, `${source.name}, pages ${first} to ${end}`),
      bytes: bytesOfRange(source.size, first, end, frames),
    };
  }
}

async function listedParts(
  source: ByteSource,
  shape: TiffShape,
  index: PageIndex,
  first: number,
  end: number,
): Promise<PageParts[]> {
  const listed: PageParts[] = [];
  for (let start = first; start < end; start += pagesAtOnce) {
    const pages = Array.from({ length: Math.min(pagesAtOnce, end - start) }, (_, k) => start + k);
    listed.push(
      ...(await Promise.all(
        pages.map((page) => readParts(source, shape, index.geometry, page, index.placeOf(page))),
      )),
    );
  }
  return listed;
}

function describedParts({ geometry, placeOf }: PageIndex, first: number, end: number): PageParts[] {
  const { frameBytes } = geometry;
  const start = placeOf(0).offsets.only;
  return Array.from({ length: end - first }, (_, k) => ({
    page: first + k,
    offsets: Float64Array.of(start + (first + k) * frameBytes),
    counts: Float64Array.of(frameBytes),
  }));
}
