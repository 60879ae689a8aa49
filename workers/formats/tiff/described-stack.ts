import type { ByteSource } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { findEntry, type TiffShape } from './directory';
import type { PageIndex } from './page-index';

const imageDescription = 270;
const mostDescriptionBytes = 2 ** 16;

/**
 * Frames of a file with one page whose description tells of more: writers leave out the directories of long stacks and
 * write the frames one after the other behind the first ("images=N" in lines, or a JSON object with the shape and
 * "truncated"). 1 when nothing is told. Throws `truncated` or `unsupported` when what is told does not fit the file.
 */
export async function countDescribed(
  source: ByteSource,
  shape: TiffShape,
  index: PageIndex,
): Promise<number> {
  const entry = findEntry(shape, index.firstDirectory, imageDescription);
  if (index.pages !== 1 || entry === null) return 1;
  const bytes = await source.read(entry.at, entry.at + Math.min(entry.count, mostDescriptionBytes));
  const frames = framesIn(new TextDecoder('latin1').decode(bytes), index.geometry);
  if (frames === 1) return 1;
  const { geometry } = index;
  const { offsets } = index.placeOf(0);
  const place = `${source.name}, page 0`;
  if (geometry.compression !== 'none' || geometry.isTiled || geometry.parts !== 1) {
    throw new Problem(
      'unsupported',
      `${source.name} has one page, but its description tells of ${frames} frames, which are found only when they are stored whole and without compression; save one page a frame.`,
      place,
    );
  }
  const end = offsets.only + frames * geometry.frameBytes;
  if (end <= source.size) return frames;
  throw new Problem(
    'truncated',
    `Expected ${frames} frames in ${source.name}, as its description says, and so ${end} bytes, found ${source.size}; it was cut short, copy or save it again.`,
    `${source.name}, byte ${source.size}`,
  );
}

function framesIn(description: string, { width, height }: { width: number; height: number }): number {
  const images = /^images=(\d{1,9})\s*$/m.exec(description)?.[1];
  if (images !== undefined) return Math.max(1, Number(images));
  const shape = /^\s*\{.*"truncated"\s*:\s*true/s.test(description)
    ? /"shape"\s*:\s*\[([\d,\s]{1,200})\]/.exec(description)?.[1]
    : undefined;
  if (shape === undefined) return 1;
  const values = shape.split(',').reduce((product, size) => product * Number(size), 1);
  const frames = values / (width * height);
  return Number.isSafeInteger(frames) && frames > 1 ? frames : 1;
}
