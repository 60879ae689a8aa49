import { Problem } from '../../../shared/errors/problem';
import type { NumberType } from '../numbers';
import type { PageTags } from './page-tags';

export type Compression = 'none' | 'lzw' | 'deflate' | 'packbits';

/** How every page of the file is stored. A part is a strip or a tile. */
export interface Geometry {
  width: number;
  height: number;
  number: NumberType;
  isLittle: boolean;
  compression: Compression;
  /** 1 none, 2 differences of neighbours, 3 differences of the bytes of floats. */
  predictor: 1 | 2 | 3;
  partWidth: number;
  partHeight: number;
  partsAcross: number;
  parts: number;
  /** Tiles are whole at the borders, strips are not. */
  isTiled: boolean;
  frameBytes: number;
}

/** A frame is held whole. */
const mostFrameBytes = 2 ** 28;

const compressions: Record<number, Compression> = {
  1: 'none',
  5: 'lzw',
  8: 'deflate',
  32946: 'deflate',
  32773: 'packbits',
};

const otherCompressions: Record<number, string> = {
  2: 'CCITT run lengths',
  3: 'CCITT fax 3',
  4: 'CCITT fax 4',
  6: 'JPEG (old)',
  7: 'JPEG',
  34712: 'JPEG 2000',
  34887: 'LERC',
  34925: 'LZMA',
  50000: 'Zstandard',
  50001: 'WebP',
  50002: 'JPEG XL',
};

const photometrics: Record<number, string> = {
  0: 'white as zero',
  2: 'red, green and blue',
  3: 'a palette of colours',
  4: 'a mask',
  5: 'colour separations',
  6: 'YCbCr colours',
  8: 'CIE L*a*b* colours',
  32803: 'a colour filter array',
  34892: 'raw colours',
};

const sampleFamilies: Record<number, NumberType['family']> = { 1: 'uint', 2: 'int', 3: 'float', 4: 'uint' };

/** How pages with these tags are stored. Throws `unsupported`, by name, and `unreadable`. */
export function geometryOf(tags: PageTags, isLittle: boolean, fileName: string): Geometry {
  const place = `${fileName}, page 0`;
  assertReadable(tags, fileName, place);
  const { width, height, bits, tileWidth, tileHeight } = tags;
  const bytes = bits / 8;
  const isTiled = tileWidth > 0;
  const partWidth = isTiled ? tileWidth : width;
  const partHeight = isTiled ? tileHeight : Math.min(height, tags.rowsPerStrip || height);
  const sizes = [width, height, partWidth, partHeight];
  if (!sizes.every((size) => Number.isSafeInteger(size) && size > 0)) {
    throw new Problem(
      'unreadable',
      `Expected frames of some width and height in ${fileName}, found ${width} x ${height} in parts of ${partWidth} x ${partHeight}; the file is damaged, save the frames again.`,
      place,
    );
  }
  const partsAcross = Math.ceil(width / partWidth);
  const parts = partsAcross * Math.ceil(height / partHeight);
  const frameBytes = width * height * bytes;
  if (frameBytes > mostFrameBytes || partWidth * partHeight * bytes > mostFrameBytes) {
    throw new Problem(
      'unsupported',
      `One frame of ${fileName} takes ${frameBytes} bytes (${width} x ${height}), more than ${mostFrameBytes}; save the part of the frames that is lit.`,
      place,
    );
  }
  const compression = compressions[tags.compression]!;
  return {
    width,
    height,
    number: { family: sampleFamilies[tags.sampleFormat]!, bytes },
    isLittle,
    compression,
    // Without compression nothing is predicted, whatever is said.
    predictor: compression === 'none' ? 1 : (tags.predictor as 1 | 2 | 3),
    partWidth,
    partHeight,
    partsAcross,
    parts,
    isTiled,
    frameBytes,
  };
}

function assertReadable(tags: PageTags, fileName: string, place: string): void {
  const { compression, photometric, samples, bits, sampleFormat, predictor } = tags;
  const refuse = (found: string, wayOut: string): Problem =>
    new Problem('unsupported', `${fileName} holds ${found}, which is not read; ${wayOut}.`, place);
  if (compressions[compression] === undefined) {
    const name = otherCompressions[compression] ?? `number ${compression}`;
    throw refuse(`frames compressed by ${name}`, 'save them without compression, or by deflate or LZW');
  }
  if (photometric !== 1) {
    const name = photometrics[photometric] ?? `photometric interpretation ${photometric}`;
    throw refuse(`pictures in ${name}`, 'save the counts of the camera as grey values with black as zero');
  }
  if (samples !== 1) {
    throw refuse(`${samples} samples in a pixel`, 'save one channel, as grey values');
  }
  const family = sampleFamilies[sampleFormat];
  const sizes = family === 'float' ? [16, 32, 64] : [8, 16, 32, 64];
  if (family === undefined || !sizes.includes(bits)) {
    const name = family === undefined ? `sample format ${sampleFormat}` : `${family} samples`;
    throw refuse(`${name} of ${bits} bits`, 'save integers of 8, 16 or 32 bits or floats of 32 or 64');
  }
  if (tags.fillOrder !== 1) throw refuse('bytes with their bits reversed', 'save with fill order 1');
  if (tags.depth !== 1) throw refuse('pages with a depth', 'save one page a frame');
  const isPossible = predictor === 1 || predictor === 2 || (predictor === 3 && family === 'float');
  if (!isPossible) throw refuse(`samples with predictor ${predictor}`, 'save without a predictor');
}
