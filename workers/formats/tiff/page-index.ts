import type { ByteSource } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { walkPages } from './chain';
import type { TiffDirectory, TiffShape } from './directory';
import { type Geometry, geometryOf } from './geometry';
import { type PageTags, parsePageTags, sharedTags, type TiffValues } from './page-tags';

/** Where the parts of a page are told: in the directory when there is one part, else in two lists. */
export interface PagePlace {
  offsets: TiffValues;
  /** Null when a page does not say how long its only, uncompressed part is. */
  counts: TiffValues | null;
}

export interface PageIndex {
  geometry: Geometry;
  pages: number;
  /** Of the first page. */
  tags: PageTags;
  firstDirectory: TiffDirectory;
  placeOf(page: number): PagePlace;
}

const valuesColumns = 4;
const columns = 2 * valuesColumns;

/**
 * Walks all pages, compares each with the first and keeps eight numbers of it: where its lists of parts are. Throws
 * `wrong-type` naming the page that differs, and what walking and the first page throw.
 */
export async function indexPages(source: ByteSource, shape: TiffShape): Promise<PageIndex> {
  let kept = new Float64Array(1024 * columns);
  let first: { tags: PageTags; geometry: Geometry; directory: TiffDirectory } | null = null;
  const pages = await walkPages(source, shape, (directory) => {
    const tags = parsePageTags(shape, directory);
    if (first === null) {
      const geometry = geometryOf(tags, shape.isLittle, source.name);
      first = { tags, geometry, directory: { ...directory } };
    } else {
      assertSame(first.tags, tags, directory.page, source.name);
    }
    assertParts(tags, first.geometry, directory.page, source);
    const at = directory.page * columns;
    if (at === kept.length) {
      const grown = new Float64Array(2 * kept.length);
      grown.set(kept);
      kept = grown;
    }
    keep(kept, at, tags.offsets);
    keep(kept, at + valuesColumns, tags.counts);
  });
  const { tags, geometry, directory } = first!;
  return {
    geometry,
    pages,
    tags,
    firstDirectory: directory,
    placeOf: (page) => ({
      offsets: take(kept, page * columns)!,
      counts: take(kept, page * columns + valuesColumns),
    }),
  };
}

/** A count of 0 stands for no list. */
function keep(kept: Float64Array, at: number, values: TiffValues | null): void {
  kept[at] = values?.type ?? 0;
  kept[at + 1] = values?.count ?? 0;
  kept[at + 2] = values?.at ?? 0;
  kept[at + 3] = values?.only ?? Number.NaN;
}

function take(kept: Float64Array, at: number): TiffValues | null {
  if (kept[at + 1] === 0) return null;
  return { type: kept[at]!, count: kept[at + 1]!, at: kept[at + 2]!, only: kept[at + 3]! };
}

function assertSame(first: PageTags, tags: PageTags, page: number, fileName: string): void {
  for (const [tag, words] of sharedTags) {
    if (Object.is(first[tag], tags[tag])) continue;
    throw new Problem(
      'wrong-type',
      `Expected every page of ${fileName} to be stored like the first, found ${words} ${tags[tag]} at page ${page} and ${first[tag]} at page 0; save the frames alone, all of one size and type.`,
      `${fileName}, page ${page}`,
    );
  }
}

function assertParts(
  tags: PageTags,
  { parts, compression }: Geometry,
  page: number,
  { name, size }: ByteSource,
): void {
  const { offsets, counts } = tags;
  const place = `${name}, page ${page}`;
  const isCountFree = parts === 1 && compression === 'none';
  const hasOffsets = offsets !== null && offsets.count >= parts;
  if (!hasOffsets || (counts === null ? !isCountFree : counts.count < parts)) {
    throw new Problem(
      'unreadable',
      `Expected the places of ${parts} parts at page ${page} of ${name}, found ${hasOffsets ? (counts?.count ?? 0) : (offsets?.count ?? 0)}; the file is damaged, save the frames again.`,
      place,
    );
  }
  for (const values of [offsets, counts]) {
    // The least a list takes; what it takes in truth is known when it is read.
    if (values !== null && Number.isNaN(values.only) && values.at + values.count > size) {
      throw new Problem(
        'truncated',
        `Expected ${values.count} places of parts of page ${page} at byte ${values.at} of ${name}, found only ${size} bytes; it was cut short, copy or save it again.`,
        `${name}, page ${page}, byte ${size}`,
      );
    }
  }
}
