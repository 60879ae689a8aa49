import type { ByteSource } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { decodeWhole, type TiffShape, valueBytes } from './directory';
import type { Geometry } from './geometry';
import type { PagePlace } from './page-index';
import type { TiffValues } from './page-tags';

/** Where the parts of a page lie. */
export interface PageParts {
  page: number;
  offsets: Float64Array;
  counts: Float64Array;
}

/** Rows that are stored of a part: strips end with the picture, tiles are whole. */
export function storedRows({ isTiled, partHeight, height, partsAcross }: Geometry, part: number): number {
  if (isTiled) return partHeight;
  return Math.min(partHeight, height - Math.floor(part / partsAcross) * partHeight);
}

/** Reads the lists of a page and proves that its parts are there and apart. Throws `truncated` or `unreadable`. */
export async function readParts(
  source: ByteSource,
  shape: TiffShape,
  geometry: Geometry,
  page: number,
  place: PagePlace,
): Promise<PageParts> {
  const { parts, compression, frameBytes } = geometry;
  const [offsets, counts] = await Promise.all([
    readValues(source, shape, place.offsets, parts, page),
    place.counts === null
      ? Float64Array.of(frameBytes)
      : readValues(source, shape, place.counts, parts, page),
  ]);
  for (let part = 0; part < parts; part += 1) {
    const bytes = counts[part]!;
    const needed = storedRows(geometry, part) * geometry.partWidth * geometry.number.bytes;
    if (bytes === 0 || (compression === 'none' && bytes < needed)) {
      throw damaged(source, page, `${bytes} bytes where ${needed} are needed`);
    }
    if (offsets[part]! + (compression === 'none' ? needed : bytes) > source.size) {
      throw new Problem(
        'truncated',
        `Expected ${bytes} bytes of page ${page} at byte ${offsets[part]} of ${source.name}, found only ${source.size} bytes; it was cut short or its writing was not finished, copy or save it again.`,
        `${source.name}, page ${page}, byte ${source.size}`,
      );
    }
    // Uncompressed parts may claim more than they need; no more is read.
    if (compression === 'none') counts[part] = needed;
    else if (bytes > 2 * needed + 4096) {
      throw damaged(source, page, `${bytes} packed bytes for ${needed} unpacked ones`);
    }
  }
  assertApart(source, page, offsets, counts);
  return { page, offsets, counts };
}

async function readValues(
  source: ByteSource,
  { isLittle }: TiffShape,
  { type, at, only }: TiffValues,
  parts: number,
  page: number,
): Promise<Float64Array> {
  if (parts === 1 && !Number.isNaN(only)) return Float64Array.of(only);
  const bytes = await source.read(at, at + parts * (valueBytes[type] ?? 1));
  const values = decodeWhole(bytes, type, isLittle, `page ${page} of ${source.name}`);
  if (values.length === parts) return values;
  throw new Problem(
    'truncated',
    `Expected ${parts} places of parts of page ${page} at byte ${at} of ${source.name}, found ${values.length}; it was cut short, copy or save it again.`,
    `${source.name}, page ${page}, byte ${source.size}`,
  );
}

function assertApart(source: ByteSource, page: number, offsets: Float64Array, counts: Float64Array): void {
  const isRising = offsets.every((offset, k) => k === 0 || offset >= offsets[k - 1]! + counts[k - 1]!);
  if (isRising) return;
  const order = Uint32Array.from(offsets.keys()).sort((a, b) => offsets[a]! - offsets[b]!);
  for (let k = 1; k < order.length; k += 1) {
    const before = order[k - 1]!;
    if (offsets[order[k]!]! < offsets[before]! + counts[before]!) {
      throw damaged(source, page, 'parts that lie over each other');
    }
  }
}

export function damaged({ name }: ByteSource, page: number, found: string): Problem {
  return new Problem(
    'unreadable',
    `Expected the pixels of page ${page} of ${name}, found ${found}; the file is damaged, save the frames again.`,
    `${name}, page ${page}`,
  );
}
