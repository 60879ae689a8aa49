import type { CancelToken } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { passTurn } from '../turn';
import type { ArrayBytes } from './array-bytes';
import type { Stack } from './stack';

/** Frames gathered by one pass over the array, in bytes; one pass reads all of it in pieces. */
const heldBytes = 2 ** 27;
const pieceBytes = 2 ** 23;
/** Unpacking is ten times slower than reading. */
const mostPasses = { plain: 32, stream: 4 };

/** Passes over the array that reading all its frames takes. Throws `unsupported` when they are too many to wait for. */
export function countPasses({ array, height, width, number, frames }: Stack): number {
  const passes = Math.ceil((frames * height * width * number.bytes) / heldBytes);
  const most = array.isStream ? mostPasses.stream : mostPasses.plain;
  if (passes <= most) return passes;
  throw new Problem(
    'unsupported',
    `${array.place} is stored in Fortran order, so that the pixels of a frame lie apart: its frames would take ${passes} readings of the whole array, more than ${most}; save it again by numpy.save(name, numpy.ascontiguousarray(array)).`,
    array.place,
  );
}

/**
 * Frames of an array in Fortran order (frame index fastest): element (f, y, x) is number f + frames * (y + height * x).
 * A pass over the array gathers the 128 MiB of frames around those asked for, which are kept for the next ranges.
 */
export function stridedFrames(
  stack: Stack,
  bytes: ArrayBytes,
): (start: number, end: number, token: CancelToken) => Promise<Uint8Array> {
  const { frames, height, width, number, array } = stack;
  const frameBytes = height * width * number.bytes;
  const heldFrames = Math.max(1, Math.floor(heldBytes / frameBytes));
  let held: { start: number; end: number; bytes: Uint8Array } | null = null;

  async function gather(start: number, end: number, token: CancelToken): Promise<Uint8Array> {
    const into = new Uint8Array((end - start) * frameBytes);
    const columnBytes = frames * number.bytes;
    const pixels = height * width;
    // Whole runs of one pixel where they are short, else the wanted part of one run at a time.
    const runs = Math.max(1, Math.floor(pieceBytes / columnBytes));
    for (let first = 0; first < pixels; first += runs) {
      await passTurn(token);
      const last = Math.min(pixels, first + runs);
      const from = array.dataStart + first * columnBytes + start * number.bytes;
      const to = array.dataStart + (last - 1) * columnBytes + end * number.bytes;
      scatter(await bytes.read(from, to, token), first, last, end - start, stack, into);
    }
    return into;
  }

  return async (start, end, token) => {
    const parts = new Uint8Array((end - start) * frameBytes);
    for (let at = start; at < end; ) {
      if (held === null || at < held.start || at >= held.end) {
        const first = at - (at % heldFrames);
        const last = Math.min(frames, first + heldFrames);
        // Given back before the next is taken: never two at once.
        held = null;
        held = { start: first, end: last, bytes: await gather(first, last, token) };
      }
      const stop = Math.min(end, held.end);
      parts.set(
        held.bytes.subarray((at - held.start) * frameBytes, (stop - held.start) * frameBytes),
        (at - start) * frameBytes,
      );
      at = stop;
    }
    return parts;
  };
}

/** Pixels [first, last), each a run of frames, into whole frames. */
function scatter(
  piece: Uint8Array,
  first: number,
  last: number,
  count: number,
  { frames, height, width, number }: Stack,
  into: Uint8Array,
): void {
  const { bytes } = number;
  const frameBytes = height * width * bytes;
  for (let pixel = first; pixel < last; pixel += 1) {
    const y = pixel % height;
    const x = (pixel - y) / height;
    let f = (pixel - first) * frames * bytes;
    let t = (y * width + x) * bytes;
    for (let k = 0; k < count; k += 1, f += bytes, t += frameBytes) {
      for (let byte = 0; byte < bytes; byte += 1) into[t + byte] = piece[f + byte]!;
    }
  }
}
