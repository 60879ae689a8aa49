import type { FrameBlock } from '../../../../shared/contracts/blocks';
import type { FrameSpec, FrameTally } from '../../../../shared/contracts/tally';

/** The slow twin of the frame accumulator: the matrices of the estimator in full, and every projection as a loop. */
export function frameBlock(spec: FrameSpec, frames: number[][], firstFrame: number): FrameBlock {
  return {
    kind: 'frames',
    firstFrame,
    count: frames.length,
    width: spec.width,
    height: spec.height,
    pixels: Float64Array.from(frames.flat()),
    bytes: frames.length * spec.width * spec.height * 2,
  };
}

/** G_ij (F-1) of the stretches of consecutive frames given, symmetrised, by its definition. */
export function slowCovariance(stretches: number[][][], pixels: number): number[][] {
  const matrix = Array.from({ length: pixels }, () => new Array<number>(pixels).fill(0));
  for (const frames of stretches) {
    for (let l = 0; l + 1 < frames.length; l++) {
      const now = frames[l]!;
      const next = frames[l + 1]!;
      for (let i = 0; i < pixels; i++) {
        for (let j = 0; j < pixels; j++) {
          matrix[i]![j]! += now[i]! * now[j]! - (now[i]! * next[j]! + next[i]! * now[j]!) / 2;
        }
      }
    }
  }
  return matrix;
}

export function projections(matrix: number[][], width: number, height: number) {
  const wide = 2 * width - 1;
  const high = 2 * height - 1;
  const plus = new Float64Array(wide * high);
  const minus = new Float64Array(wide * high);
  const jointX = new Float64Array(width * width);
  const jointY = new Float64Array(height * height);
  const diagonal = new Float64Array(width * height);
  for (let i = 0; i < width * height; i++) {
    for (let j = 0; j < width * height; j++) {
      const [xi, yi, xj, yj] = [i % width, Math.floor(i / width), j % width, Math.floor(j / width)];
      const value = matrix[i]![j]!;
      plus[(yi + yj) * wide + xi + xj]! += value;
      minus[(yj - yi + height - 1) * wide + xj - xi + width - 1]! += value;
      jointX[xj * width + xi]! += value;
      jointY[yj * height + yi]! += value;
      if (i === j) diagonal[i]! += value;
    }
  }
  return { plus, minus, jointX, jointY, diagonal };
}

/** The whole tally of gapless frames from 0 on. */
export function slowFrameTally(spec: FrameSpec, raw: number[][]): FrameTally {
  const { width, height, blocks } = spec;
  const pixels = width * height;
  const frames = raw.map((frame) => frame.map((value, i) => (spec.masked[i] === 0 ? value : 0)));
  const blockOf = (frame: number) => Math.floor((frame * blocks) / spec.frames);
  const tally: FrameTally = {
    kind: 'frames',
    width,
    height,
    frames: frames.length,
    differences: Math.max(0, frames.length - 1),
    masked: spec.masked,
    sum: Float64Array.from({ length: pixels }, (_, i) => frames.reduce((sum, frame) => sum + frame[i]!, 0)),
    sumSquares: Float64Array.from({ length: pixels }, (_, i) =>
      frames.reduce((sum, frame) => sum + frame[i]! ** 2, 0),
    ),
    ...projections(slowCovariance([frames], pixels), width, height),
    blockFrames: new Float64Array(blocks),
    blockTotals: new Float64Array(blocks),
    blockDifferences: new Float64Array(blocks),
    blockWindow: { x: 0, y: 0, nx: 2 * width - 1, ny: 2 * height - 1 },
    blockPlus: [],
    blockMinus: [],
  };
  const blockPlus: (Float32Array | null)[] = [];
  const blockMinus: (Float32Array | null)[] = [];
  for (let block = 0; block < blocks; block++) {
    const own = frames.filter((_, l) => blockOf(l) === block);
    const total = own.flat().reduce((sum, value) => sum + value, 0);
    tally.blockFrames[block] = own.length;
    tally.blockTotals[block] = own.length === 0 ? 0 : total / own.length;
    const matrix = Array.from({ length: pixels }, () => new Array<number>(pixels).fill(0));
    for (let k = 0; k + 1 < frames.length; k++) {
      if (blockOf(k) !== block) continue;
      tally.blockDifferences[block]! += 1;
      const difference = frames[k]!.map((value, i) => value - frames[k + 1]![i]!);
      for (let i = 0; i < pixels; i++) {
        for (let j = 0; j < pixels; j++) matrix[i]![j]! += (difference[i]! * difference[j]!) / 2;
      }
    }
    const { plus, minus, diagonal } = projections(matrix, width, height);
    for (let i = 0; i < pixels; i++) {
      plus[2 * Math.floor(i / width) * (2 * width - 1) + 2 * (i % width)]! -= diagonal[i]!;
    }
    const filled = tally.blockDifferences[block]! > 0;
    blockPlus.push(filled ? Float32Array.from(plus) : null);
    blockMinus.push(filled ? Float32Array.from(minus) : null);
  }
  return { ...tally, blockPlus, blockMinus };
}
