import type { FrameSpec } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';

/** Sums of one bootstrap block: frames l of it, and D_k D_k / 2 of the differences k of it inside the block window. */
export interface BlockSums {
  frames: number;
  /** Light of its frames, before they were normalised. */
  total: number;
  differences: number;
  /** i = j taken out. */
  plus: Float32Array;
  minus: Float32Array;
}

/** A gapless stretch of frames: both ends are kept, to close gaps and to correct the totals. */
export interface Segment {
  first: number;
  last: number;
  firstImage: Float64Array;
  lastImage: Float64Array;
}

/** Sums over all blocks, whole maps, i = j included. */
export interface FrameTotals {
  sum: Float64Array;
  sumSquares: Float64Array;
  jointX: Float64Array;
  jointY: Float64Array;
  plus: Float64Array;
  minus: Float64Array;
  diagonal: Float64Array;
  /** Of the region of the specification, as `FrameTally.joint`; without one left out. */
  joint?: Float64Array;
}

/** Version 2. Only the bootstrap blocks that the range has touched are in it. */
export interface FramePart {
  part: 2;
  kind: 'frames';
  /** What was counted, and how: parts of another specification do not add up. */
  key: string;
  totals: FrameTotals;
  touched: (BlockSums & { block: number })[];
  segments: Segment[];
}

export function frameKey(spec: FrameSpec): string {
  const { width, height, frames, blocks } = spec;
  const { offset, threshold, normalised, blockSide, jointRegion = null } = spec;
  return JSON.stringify([
    [width, height, frames, blocks],
    [offset ?? 0, threshold ?? null, normalised ?? false, blockSide ?? BLOCK_SIDE],
    ...(jointRegion === null ? [] : [[jointRegion.x0, jointRegion.y0, jointRegion.x1, jointRegion.y1]]),
  ]);
}

/** Pixels of a region, and values of their joint distribution. */
export function jointPixels({ jointRegion }: FrameSpec): number {
  if (jointRegion === null || jointRegion === undefined) return 0;
  const { x0, y0, x1, y1 } = jointRegion;
  return (x1 - x0 + 1) * (y1 - y0 + 1);
}

export function jointLength(spec: FrameSpec): number {
  const n = jointPixels(spec);
  return (n * (n + 1)) / 2;
}

/** The whole map of 256 pixels. */
const BLOCK_SIDE = 511;

/** The part of a map that is kept block by block, around its middle. */
export function blockWindow(spec: FrameSpec): { x: number; y: number; nx: number; ny: number } {
  const side = spec.blockSide ?? BLOCK_SIDE;
  const wide = 2 * spec.width - 1;
  const high = 2 * spec.height - 1;
  const nx = Math.min(wide, side);
  const ny = Math.min(high, side);
  return { x: Math.floor((wide - nx) / 2), y: Math.floor((high - ny) / 2), nx, ny };
}

export function createTotals(spec: FrameSpec): FrameTotals {
  const { width, height } = spec;
  const pixels = width * height;
  const cells = (2 * width - 1) * (2 * height - 1);
  return {
    sum: new Float64Array(pixels),
    sumSquares: new Float64Array(pixels),
    jointX: new Float64Array(width * width),
    jointY: new Float64Array(height * height),
    plus: new Float64Array(cells),
    minus: new Float64Array(cells),
    diagonal: new Float64Array(pixels),
    ...(jointPixels(spec) > 0 ? { joint: new Float64Array(jointLength(spec)) } : {}),
  };
}

export const totalNames = ['sum', 'sumSquares', 'jointX', 'jointY', 'plus', 'minus', 'diagonal'] as const;

/** @throws Problem `newer-version` for a part of a later engine, `bad-input` for one of another stack. */
export function assertFramePart(spec: FrameSpec, part: FramePart): void {
  if (part.part !== 2) {
    throw new Problem(
      'newer-version',
      `A part of version 2 was expected, version ${String(part.part)} was found; use the engine that wrote it.`,
    );
  }
  if (part.kind !== 'frames' || part.key !== frameKey(spec)) {
    throw new Problem(
      'bad-input',
      'The part was summed over another stack or other blocks; use parts of one run.',
    );
  }
}
