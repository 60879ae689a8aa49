import type { FrameBlock } from '../../../shared/contracts/blocks';
import type { NpyFramesLayout } from '../../../shared/contracts/layout';
import type { ByteSource, CancelToken, Reader, ReadRange } from '../../../shared/contracts/reader';
import { swapBytes } from '../gather';
import { numberName, viewPixels } from '../numbers';
import { assertRange, bytesOfRange } from '../ranges';
import { passTurn } from '../turn';
import type { ArrayFile } from './arrays';
import { placeStack, type Stack } from './stack';
import { countPasses, stridedFrames } from './strided-frames';

/** Bytes of frames a block; at least one frame. */
const mostBytes = 2 ** 23;

type ReadFrameBytes = (start: number, end: number, token: CancelToken) => Promise<Uint8Array>;

/** Frames of a 3-D array (frame, y, x), or of a 4-D one with an axis of length 1, in either order of storage. */
export async function openFrames(
  source: ByteSource,
  file: ArrayFile,
  layout: NpyFramesLayout,
): Promise<Reader> {
  const stack = placeStack(await file.find(layout.array));
  const { frames, height, width, number, array } = stack;

  if (array.isFortran) countPasses(stack);
  const bytes = await array.openBytes();
  const frameBytes = height * width * number.bytes;
  const readBytes: ReadFrameBytes = array.isFortran
    ? stridedFrames(stack, bytes)
    : (start, end, token) =>
        bytes.read(array.dataStart + start * frameBytes, array.dataStart + end * frameBytes, token);
  return {
    facts: { kind: 'frames', frames, width, height, type: numberName(number), reader: 'npy' },
    tickOffsetAt: async () => 0n,
    read: (range, _tickOffset, token) =>
      readFrames(source, stack, readBytes, assertRange(range, frames, 'frames', source.name), token),
    close: () => source.close(),
  };
}

async function* readFrames(
  source: ByteSource,
  { array, number, isBig, frames, height, width }: Stack,
  readBytes: ReadFrameBytes,
  range: ReadRange,
  token: CancelToken,
): AsyncGenerator<FrameBlock> {
  const rows = Math.max(1, Math.floor(mostBytes / (height * width * number.bytes)));
  for (let first = range.start; first < range.end; first += rows) {
    await passTurn(token);
    const end = Math.min(first + rows, range.end);
    const packed = await readBytes(first, end, token);
    const pixels = isBig ? swapBytes(packed, number.bytes) : packed;
    yield {
      kind: 'frames',
      firstFrame: first,
      count: end - first,
      width,
      height,
      pixels: viewPixels(pixels, number, `${array.place}, frames ${first} to ${end}`),
      bytes: bytesOfRange(source.size, first, end, frames),
    };
  }
}
