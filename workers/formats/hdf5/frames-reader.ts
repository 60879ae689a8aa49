import type { FrameBlock, PixelArray } from '../../../shared/contracts/blocks';
import type { Hdf5FramesLayout } from '../../../shared/contracts/layout';
import type { ByteSource, CancelToken, Reader, ReadRange } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { exactDoubles, type NumberType, numberName, viewNumbers } from '../numbers';
import { assertRange, bytesOfRange } from '../ranges';
import { passTurn } from '../turn';
import { nextEnd } from './chunks';
import { findDataset } from './columns';
import { type DatasetEntry, type Hdf5Tree, rowBytesOf, typeName } from './tree';

/** Bytes of frames a block; at least one frame. */
const mostBytes = 2 ** 23;

/** Frames of a 3-D dataset (frame, y, x) of integers or floats, read a few at a time. */
export function openFrames(tree: Hdf5Tree, source: ByteSource, layout: Hdf5FramesLayout): Reader {
  const dataset = findDataset(tree, layout.dataset, source.name);
  const number = pixelNumber(dataset, source.name);
  const [frames, height, width] = dataset.shape as [number, number, number];
  return {
    facts: { kind: 'frames', frames, width, height, type: numberName(number), reader: tree.reader },
    tickOffsetAt: async () => 0n,
    read: (range, _tickOffset, token) =>
      readFrames(tree, source, dataset, number, assertRange(range, frames, 'frames', source.name), token),
    close: async () => {
      tree.close();
      await source.close();
    },
  };
}

function pixelNumber(dataset: DatasetEntry, fileName: string): NumberType {
  const { shape, type, path } = dataset;
  const place = `${fileName}, ${path}`;
  if (type.kind !== 'number' || shape.length !== 3) {
    throw new Problem(
      'wrong-type',
      `Expected frames as numbers in three dimensions (frame, y, x), found ${typeName(type)} with ${shape.length === 1 ? 'one' : shape.length} in ${path}; point to a stack of frames.`,
      place,
    );
  }
  if (type.number.family === 'float' && type.number.bytes === 2) {
    throw new Problem(
      'unsupported',
      `${path} holds float16, which is not read; save the frames as integers or float32.`,
      place,
    );
  }
  if (shape.some((size) => size === 0)) {
    throw new Problem(
      'wrong-type',
      `${path} holds no pixels (${shape.join(' x ')}); point to a stack of frames.`,
      place,
    );
  }
  return type.number;
}

async function* readFrames(
  tree: Hdf5Tree,
  source: ByteSource,
  dataset: DatasetEntry,
  number: NumberType,
  range: ReadRange,
  token: CancelToken,
): AsyncGenerator<FrameBlock> {
  const [frames, height, width] = dataset.shape as [number, number, number];
  const rows = Math.max(1, Math.floor(mostBytes / rowBytesOf(dataset)));
  for (let first = range.start; first < range.end; ) {
    await passTurn(token);
    const end = nextEnd(first, range.end, rows, dataset.chunkRows);
    const bytes = tree.readRows(dataset, first, end);
    yield {
      kind: 'frames',
      firstFrame: first,
      count: end - first,
      width,
      height,
      pixels: pixelsOf(bytes, number, `${source.name}, ${dataset.path}, frames ${first} to ${end}`),
      bytes: bytesOfRange(source.size, first, end, frames),
    };
    first = end;
  }
}

function pixelsOf(bytes: Uint8Array, number: NumberType, place: string): PixelArray {
  const isLong = number.family !== 'float' && number.bytes === 8;
  return isLong ? exactDoubles(bytes, number.family, place) : viewNumbers(bytes, number);
}
