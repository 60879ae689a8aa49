import { entryBytesOf, readWord, type TiffDirectory, type TiffShape, valueBytes, viewOf } from './directory';

/** Values stored elsewhere in the file, or in the directory itself where they fit. */
export interface TiffValues {
  type: number;
  count: number;
  /** Where the values start in the file. */
  at: number;
  /** The first value when it is held in the directory, else NaN. */
  only: number;
}

/** What a directory says of how its picture is stored: TIFF 6.0, sections 3 to 15; 0 where it says nothing. */
export interface PageTags {
  width: number;
  height: number;
  bits: number;
  compression: number;
  photometric: number;
  fillOrder: number;
  orientation: number;
  samples: number;
  rowsPerStrip: number;
  predictor: number;
  tileWidth: number;
  tileHeight: number;
  sampleFormat: number;
  depth: number;
  offsets: TiffValues | null;
  counts: TiffValues | null;
}

type NumberTag = Exclude<keyof PageTags, 'offsets' | 'counts'>;

const numberTags: Partial<Record<number, NumberTag>> = {
  256: 'width',
  257: 'height',
  258: 'bits',
  259: 'compression',
  262: 'photometric',
  266: 'fillOrder',
  274: 'orientation',
  277: 'samples',
  278: 'rowsPerStrip',
  317: 'predictor',
  322: 'tileWidth',
  323: 'tileHeight',
  339: 'sampleFormat',
  32997: 'depth',
};

/** What must be alike on every page, with the words for it. */
export const sharedTags: [NumberTag, string][] = [
  ['width', 'width'],
  ['height', 'height'],
  ['bits', 'bits per sample'],
  ['sampleFormat', 'sample format'],
  ['samples', 'samples per pixel'],
  ['photometric', 'photometric interpretation'],
  ['compression', 'compression'],
  ['predictor', 'predictor'],
  ['fillOrder', 'order of bits'],
  ['depth', 'depth'],
  ['tileWidth', 'tile width'],
  ['tileHeight', 'tile length'],
  ['rowsPerStrip', 'rows per strip'],
];

export function parsePageTags(shape: TiffShape, directory: TiffDirectory): PageTags {
  const sizes = entryBytesOf(shape);
  const { bytes } = directory;
  const view = viewOf(bytes);
  const tags: PageTags = {
    width: 0,
    height: 0,
    bits: 1,
    compression: 1,
    photometric: 1,
    fillOrder: 1,
    orientation: 1,
    samples: 1,
    rowsPerStrip: 0,
    predictor: 1,
    tileWidth: 0,
    tileHeight: 0,
    sampleFormat: 1,
    depth: 1,
    offsets: null,
    counts: null,
  };
  for (let at = sizes.count; at < bytes.length - sizes.link; at += sizes.entry) {
    const tag = view.getUint16(at, shape.isLittle);
    const name = numberTags[tag];
    // Strips and tiles are told in the same way under two numbers.
    const isOffsets = tag === 273 || tag === 324;
    if (name === undefined && !isOffsets && tag !== 279 && tag !== 325) continue;
    const values = parseValues(shape, view, at, directory.at);
    if (isOffsets) tags.offsets = values;
    else if (name === undefined) tags.counts = values;
    else tags[name] = values.only;
  }
  return tags;
}

function parseValues(shape: TiffShape, view: DataView, at: number, directoryAt: number): TiffValues {
  const { isLittle, isBig } = shape;
  const type = view.getUint16(at + 2, isLittle);
  const count = readWord(view, at + 4, shape);
  const valueAt = at + (isBig ? 12 : 8);
  const fits = count * (valueBytes[type] ?? 1) <= (isBig ? 8 : 4);
  return {
    type,
    count,
    at: fits ? directoryAt + valueAt : readWord(view, valueAt, shape),
    only: fits && count >= 1 ? wholeAt(view, valueAt, type, isLittle) : Number.NaN,
  };
}

function wholeAt(view: DataView, at: number, type: number, isLittle: boolean): number {
  if (type === 1) return view.getUint8(at);
  if (type === 3) return view.getUint16(at, isLittle);
  if (type === 4 || type === 13) return view.getUint32(at, isLittle);
  return type === 16 || type === 18 ? Number(view.getBigUint64(at, isLittle)) : Number.NaN;
}
