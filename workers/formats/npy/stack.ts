import { Problem } from '../../../shared/errors/problem';
import { stackShape } from '../stack-shape';
import type { ArrayEntry, FoundArray } from './arrays';
import { arrayName } from './columns';
import { type StoredNumber, typeName } from './element-type';

/** A stack of frames in an array: 3-D (frame, y, x), or 4-D with an axis of length 1. */
export interface Stack extends StoredNumber {
  array: ArrayEntry;
  frames: number;
  height: number;
  width: number;
}

/** A frame is held whole. */
const mostFrameBytes = 2 ** 28;

/** The stack in an array. Throws `wrong-type` or `unsupported`. */
export function placeStack(array: ArrayEntry): Stack {
  const { type, shape, place } = array;
  const sizes = stackShape(shape);
  if (type.kind !== 'number' || sizes === null) {
    throw new Problem(
      'wrong-type',
      `Expected frames as numbers in three dimensions (frame, y, x), found ${typeName(type)} with shape ${shape.join(' x ') || 'of a single value'} in ${arrayName(array)}; point to a stack of frames.`,
      place,
    );
  }
  const { frames, height, width } = sizes;
  if (shape.some((size) => size === 0)) {
    throw new Problem(
      'wrong-type',
      `${place} holds no pixels (${shape.join(' x ')}); point to a stack of frames.`,
      place,
    );
  }
  if (height * width * type.bytes > mostFrameBytes) {
    throw new Problem(
      'unsupported',
      `One frame of ${place} takes ${height * width * type.bytes} bytes (${width} x ${height}), more than ${mostFrameBytes}; save the part of the frames that is lit.`,
      place,
    );
  }
  return { array, frames, height, width, ...type.stored };
}

/** The largest stack of at least two frames and pixels each way, as a proposal. */
export function likeliestStack(found: readonly FoundArray[]): ArrayEntry | null {
  let best: ArrayEntry | null = null;
  for (const each of found) {
    if (!('array' in each) || each.array.type.kind !== 'number') continue;
    const sizes = stackShape(each.array.shape);
    const isStack = sizes !== null && sizes.frames >= 2 && sizes.height >= 2 && sizes.width >= 2;
    if (isStack && (best === null || each.array.dataBytes > best.dataBytes)) best = each.array;
  }
  return best;
}
