import type { FrameBlock } from '../../shared/contracts/blocks';
import type { FrameSpec, FrameTally } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { FrameSpectra } from '../kernels/frame-spectra';
import { addDiagonal, addOuter, projectFrame, subtract, takeFrame } from '../kernels/frame-sums';
import type { FrameWasm } from '../kernels/frame-wasm';
import { assertFramePart, type BlockSums, type FramePart, type Segment } from './frame-part';
import { addInto } from './pair-store';

/**
 * Consecutive-frame covariance of one range of frames, as maps. D_k = I_k - I_(k+1) of the unmasked pixels goes to the
 * block of frame k. With the end frames of every gapless stretch the totals are exact:
 *   sum_l [I_l I_l - sym(I_l I_(l+1))] = sum_k D_k D_k / 2 + (I_first I_first - I_last I_last)/2
 * (derived here). Ranges that are not neighbours may be merged: stretches join when the gap between them closes.
 *
 * Memory: 16 (2H-1)(2W-1) + 8 HW bytes a touched block, 270 MB for 64 blocks at 256 x 256. Block maps are not cropped.
 */
export class FrameAccumulator {
  readonly kind = 'frames';
  readonly #spec: FrameSpec;
  readonly #spectra: FrameSpectra;
  readonly #sum: Float64Array;
  readonly #sumSquares: Float64Array;
  readonly #jointX: Float64Array;
  readonly #jointY: Float64Array;
  readonly #blocks = new Map<number, BlockSums>();
  /** In order of frames. */
  #segments: Segment[] = [];
  /** Block whose spectra are being summed, null when none. */
  #open: number | null = null;
  /** A difference of the open block that waits for a second one to share its transform. */
  #waiting = false;
  #difference: Float64Array;
  #waitingDifference: Float64Array;
  #incoming: Float64Array;
  readonly #columns: Float64Array;
  readonly #rows: Float64Array;

  constructor(spec: FrameSpec) {
    const pixels = spec.width * spec.height;
    this.#spec = spec;
    this.#spectra = new FrameSpectra(spec.width, spec.height);
    this.#sum = new Float64Array(pixels);
    this.#sumSquares = new Float64Array(pixels);
    this.#jointX = new Float64Array(spec.width * spec.width);
    this.#jointY = new Float64Array(spec.height * spec.height);
    this.#difference = new Float64Array(pixels);
    this.#waitingDifference = new Float64Array(pixels);
    this.#incoming = new Float64Array(pixels);
    this.#columns = new Float64Array(spec.width);
    this.#rows = new Float64Array(spec.height);
  }

  /**
   * Takes the next frames, however many. A jump in the frame index starts a new stretch.
   * @throws Problem `bad-input` for another shape, or a pixel that is not masked and holds no finite number.
   */
  push(block: FrameBlock): void {
    if (block.kind !== 'frames') {
      throw new Problem(
        'bad-input',
        'Frames were expected but time tags were found; choose a stack of frames.',
      );
    }
    const { width, height, masked } = this.#spec;
    if (block.width !== width || block.height !== height) {
      throw new Problem(
        'bad-input',
        `Frames of ${width} x ${height} were expected, ${block.width} x ${block.height} were found.`,
      );
    }
    for (let i = 0; i < block.count; i++) {
      const start = i * width * height;
      const { total, squares } = takeFrame(
        block.pixels,
        start,
        masked,
        this.#incoming,
        this.#sum,
        this.#sumSquares,
      );
      if (!Number.isFinite(squares)) throw notNumber(this.#incoming, width, block.firstFrame + i);
      this.#append(block.firstFrame + i, total);
    }
    if (this.#segments.length > 1) this.#joinSegments();
  }

  /** Adds another range of the same acquisition. `next` says the same as before. */
  merge(next: FrameAccumulator): void {
    if (!(next instanceof FrameAccumulator)) {
      throw new Problem(
        'bad-input',
        'Frame sums can only be merged with frame sums of the same acquisition.',
      );
    }
    this.#add(next.#view());
  }

  tally(): FrameTally {
    this.#close();
    const { width, height, masked, blocks } = this.#spec;
    const cells = (2 * width - 1) * (2 * height - 1);
    const pixels = width * height;
    const tally: FrameTally = {
      kind: 'frames',
      width,
      height,
      frames: 0,
      differences: 0,
      masked: masked.slice(),
      sum: this.#sum.slice(),
      sumSquares: this.#sumSquares.slice(),
      diagonal: new Float64Array(pixels),
      plus: new Float64Array(cells),
      minus: new Float64Array(cells),
      jointX: this.#jointX.slice(),
      jointY: this.#jointY.slice(),
      blockFrames: new Float64Array(blocks),
      blockTotals: new Float64Array(blocks),
      blockPlus: new Float64Array(blocks * cells),
      blockMinus: new Float64Array(blocks * cells),
      blockDiagonal: new Float64Array(blocks * pixels),
      blockDifferences: new Float64Array(blocks),
    };
    for (let block = 0; block < blocks; block++) {
      const sums = this.#blocks.get(block);
      if (sums === undefined) continue;
      tally.frames += sums.frames;
      tally.differences += sums.differences;
      tally.blockFrames[block] = sums.frames;
      tally.blockTotals[block] = sums.frames > 0 ? sums.total / sums.frames : 0;
      tally.blockDifferences[block] = sums.differences;
      tally.blockPlus.set(sums.plus, block * cells);
      tally.blockMinus.set(sums.minus, block * cells);
      tally.blockDiagonal.set(sums.diagonal, block * pixels);
      addInto(tally.plus, sums.plus);
      addInto(tally.minus, sums.minus);
      addInto(tally.diagonal, sums.diagonal);
    }
    this.#correctEnds(tally);
    return tally;
  }

  /** A copy as plain data; its buffers may be transferred. */
  toPart(): FramePart {
    return structuredClone(this.#view());
  }

  /** Fills an accumulator that has counted nothing yet. */
  load(part: FramePart): void {
    this.#add(part);
  }

  /** All sums as they are, not copied. */
  #view(): FramePart {
    this.#close();
    const { width, height, frames, blocks } = this.#spec;
    return {
      part: 1,
      kind: 'frames',
      width,
      height,
      frames,
      blocks,
      sum: this.#sum,
      sumSquares: this.#sumSquares,
      jointX: this.#jointX,
      jointY: this.#jointY,
      touched: [...this.#blocks].map(([block, sums]) => ({ ...sums, block })),
      segments: this.#segments,
    };
  }

  #add(part: FramePart): void {
    this.#close();
    addInto(this.#sum, part.sum);
    addInto(this.#sumSquares, part.sumSquares);
    addInto(this.#jointX, part.jointX);
    addInto(this.#jointY, part.jointY);
    for (const from of part.touched) {
      const to = this.#blockSums(from.block);
      to.frames += from.frames;
      to.total += from.total;
      to.differences += from.differences;
      addInto(to.plus, from.plus);
      addInto(to.minus, from.minus);
      addInto(to.diagonal, from.diagonal);
    }
    // End images are overwritten as frames come, so they are copied.
    this.#segments.push(...structuredClone(part.segments));
    this.#joinSegments();
  }

  #append(index: number, total: number): void {
    const sums = this.#blockSums(this.#blockOf(index));
    sums.frames += 1;
    sums.total += total;
    const segment = this.#segments.find(({ last }) => last + 1 === index);
    if (segment === undefined) {
      const firstImage = this.#incoming.slice();
      this.#segments.push({ first: index, last: index, firstImage, lastImage: firstImage.slice() });
      return;
    }
    this.#addDifference(segment.last, segment.lastImage, this.#incoming);
    segment.last = index;
    const free = segment.lastImage;
    segment.lastImage = this.#incoming;
    this.#incoming = free;
  }

  /** D_k of two consecutive frames, k being the index of the earlier one. */
  #addDifference(k: number, earlier: Float64Array, later: Float64Array): void {
    const block = this.#blockOf(k);
    if (this.#open !== block) {
      this.#close();
      this.#open = block;
    }
    const difference = this.#difference;
    subtract(earlier, later, difference);
    const sums = this.#blockSums(block);
    sums.differences += 1;
    addDiagonal(difference, difference, 0.5, sums.diagonal);
    projectFrame(difference, this.#columns, this.#rows);
    addOuter(this.#columns, this.#columns, 0.5, this.#jointX);
    addOuter(this.#rows, this.#rows, 0.5, this.#jointY);
    if (this.#waiting) {
      this.#spectra.addSquares(this.#waitingDifference, difference);
      this.#waiting = false;
      return;
    }
    this.#difference = this.#waitingDifference;
    this.#waitingDifference = difference;
    this.#waiting = true;
  }

  /** Brings the open block's spectra down to its maps. Maps add, so a block may be closed and opened at any time. */
  #close(): void {
    if (this.#open === null) return;
    if (this.#waiting) this.#spectra.addSquares(this.#waitingDifference, null);
    const { plus, minus } = this.#blockSums(this.#open);
    this.#spectra.moveTo(plus, minus, 0.5);
    this.#waiting = false;
    this.#open = null;
  }

  #joinSegments(): void {
    const ordered = this.#segments.sort((a, b) => a.first - b.first);
    const joined: Segment[] = [];
    for (const segment of ordered) {
      const before = joined[joined.length - 1];
      if (before !== undefined && before.last + 1 === segment.first) {
        this.#addDifference(before.last, before.lastImage, segment.firstImage);
        before.last = segment.last;
        before.lastImage = segment.lastImage;
      } else {
        joined.push(segment);
      }
    }
    this.#segments = joined;
  }

  /** Adds (first first - last last)/2 of every stretch, written (first - last)(first + last)/2 to keep its digits. */
  #correctEnds(tally: FrameTally): void {
    const { width, height } = this.#spec;
    const less = new Float64Array(width * height);
    const more = new Float64Array(width * height);
    const vectors = [width, height, width, height].map((length) => new Float64Array(length));
    const [lessX, lessY, moreX, moreY] = vectors as [Float64Array, Float64Array, Float64Array, Float64Array];
    for (const { firstImage, lastImage } of this.#segments) {
      subtract(firstImage, lastImage, less);
      // Nothing to correct, and the transform would leave its rounding behind.
      if (less.every((value) => value === 0)) continue;
      more.set(firstImage);
      addInto(more, lastImage);
      addDiagonal(less, more, 0.5, tally.diagonal);
      projectFrame(less, lessX, lessY);
      projectFrame(more, moreX, moreY);
      addOuter(lessX, moreX, 0.5, tally.jointX);
      addOuter(lessY, moreY, 0.5, tally.jointY);
      this.#spectra.addProduct(less, more);
    }
    this.#spectra.moveTo(tally.plus, tally.minus, 0.5);
  }

  #blockOf(frame: number): number {
    const { frames, blocks } = this.#spec;
    return Math.max(0, Math.min(blocks - 1, Math.floor((frame * blocks) / frames)));
  }

  #blockSums(block: number): BlockSums {
    const found = this.#blocks.get(block);
    if (found !== undefined) return found;
    const { width, height } = this.#spec;
    const cells = (2 * width - 1) * (2 * height - 1);
    const sums: BlockSums = {
      frames: 0,
      total: 0,
      differences: 0,
      plus: new Float64Array(cells),
      minus: new Float64Array(cells),
      diagonal: new Float64Array(width * height),
    };
    this.#blocks.set(block, sums);
    return sums;
  }
}

/** Names the first pixel of a frame whose square is not a finite number. */
function notNumber(image: Float64Array, width: number, frame: number): Problem {
  const at = image.findIndex((value) => !Number.isFinite(value * value));
  const x = at % width;
  const y = Math.floor(at / width);
  return new Problem(
    'bad-input',
    `Frame ${frame} holds ${image[at]} at pixel (${x}, ${y}), where a finite number was expected; mask pixel ${at} in the detector map, or write numbers in its place.`,
    `frame ${frame}, pixel (${x}, ${y})`,
  );
}

export function createFrameAccumulator(spec: FrameSpec, _kernels: FrameWasm | null = null): FrameAccumulator {
  return new FrameAccumulator(spec);
}

/** @throws Problem `newer-version` for a part of a later engine, `bad-input` for one of another stack. */
export function frameAccumulatorFromPart(spec: FrameSpec, part: FramePart): FrameAccumulator {
  assertFramePart(spec, part);
  const accumulator = new FrameAccumulator(spec);
  accumulator.load(part);
  return accumulator;
}
