import type { FrameSpec } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';

/** Sums of one bootstrap block: frames l of it, and D_k D_k / 2 of the differences k of it. */
export interface BlockSums {
  frames: number;
  total: number;
  differences: number;
  plus: Float64Array;
  minus: Float64Array;
  diagonal: Float64Array;
}

/** A gapless stretch of frames: both ends are kept, to close gaps and to correct the totals. */
export interface Segment {
  first: number;
  last: number;
  firstImage: Float64Array;
  lastImage: Float64Array;
}

/** Version 1. Only the bootstrap blocks that the range has touched are in it. */
export interface FramePart {
  part: 1;
  kind: 'frames';
  width: number;
  height: number;
  frames: number;
  blocks: number;
  sum: Float64Array;
  sumSquares: Float64Array;
  jointX: Float64Array;
  jointY: Float64Array;
  touched: (BlockSums & { block: number })[];
  segments: Segment[];
}

/** @throws Problem `newer-version` for a part of a later engine, `bad-input` for one of another stack. */
export function assertFramePart(spec: FrameSpec, part: FramePart): void {
  if (part.part !== 1) {
    throw new Problem(
      'newer-version',
      `A part of version 1 was expected, version ${String(part.part)} was found; use the engine that wrote it.`,
    );
  }
  const fits =
    part.kind === 'frames' &&
    part.width === spec.width &&
    part.height === spec.height &&
    part.frames === spec.frames &&
    part.blocks === spec.blocks;
  if (!fits) {
    throw new Problem(
      'bad-input',
      'The part was summed over another stack or other blocks; use parts of one run.',
    );
  }
}
