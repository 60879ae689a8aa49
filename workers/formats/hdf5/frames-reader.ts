import type { FrameBlock } from '../../../shared/contracts/blocks';
import type { Hdf5FramesLayout } from '../../../shared/contracts/layout';
import type { ByteSource, CancelToken, Reader, ReadRange } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { type NumberType, numberName, viewPixels } from '../numbers';
import { assertRange, bytesOfRange } from '../ranges';
import { type StackShape, stackShape } from '../stack-shape';
import { passTurn } from '../turn';
import { nextEnd } from './chunks';
import { findDataset } from './columns';
import { type DatasetEntry, type Hdf5Tree, rowBytesOf, typeName } from './tree';

/** Bytes of frames a block; at least one frame. */
const mostBytes = 2 ** 23;

/** Frames of a dataset (frame, y, x), or of one with a fourth axis of length 1, read a few at a time. */
export function openFrames(tree: Hdf5Tree, source: ByteSource, layout: Hdf5FramesLayout): Reader {
  const dataset = findDataset(tree, layout.dataset, source.name);
  const { number, stack } = placeStack(dataset, source.name);
  const { frames, height, width } = stack;
  return {
    facts: { kind: 'frames', frames, width, height, type: numberName(number), reader: tree.reader },
    tickOffsetAt: async () => 0n,
    read: (range, _tickOffset, token) =>
      readFrames(
        tree,
        source,
        dataset,
        stack,
        number,
        assertRange(range, frames, 'frames', source.name),
        token,
      ),
    close: async () => {
      tree.close();
      await source.close();
    },
  };
}

function placeStack(dataset: DatasetEntry, fileName: string): { number: NumberType; stack: StackShape } {
  const { shape, type, path } = dataset;
  const place = `${fileName}, ${path}`;
  const stack = stackShape(shape);
  if (type.kind !== 'number' || stack === null) {
    throw new Problem(
      'wrong-type',
      `Expected frames as numbers in three dimensions (frame, y, x), found ${typeName(type)} with ${shape.length === 1 ? 'one' : shape.length} in ${path}; point to a stack of frames.`,
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
  return { number: type.number, stack };
}

async function* readFrames(
  tree: Hdf5Tree,
  source: ByteSource,
  dataset: DatasetEntry,
  { frames, height, width, frameAxis }: StackShape,
  number: NumberType,
  range: ReadRange,
  token: CancelToken,
): AsyncGenerator<FrameBlock> {
  const rows = Math.max(1, Math.floor(mostBytes / rowBytesOf(dataset, frameAxis)));
  const chunkRows = frameAxis === 0 ? dataset.chunkRows : 1;
  for (let first = range.start; first < range.end; ) {
    await passTurn(token);
    const end = nextEnd(first, range.end, rows, chunkRows);
    const bytes = tree.readRows(dataset, first, end, frameAxis);
    yield {
      kind: 'frames',
      firstFrame: first,
      count: end - first,
      width,
      height,
      pixels: viewPixels(bytes, number, `${source.name}, ${dataset.path}, frames ${first} to ${end}`),
      bytes: bytesOfRange(source.size, first, end, frames),
    };
    first = end;
  }
}
