import type { FrameBlock } from '../../shared/contracts/blocks';
import type { FrameSpec, FrameTally } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { borrowFrameKernels, type FrameKernels, returnFrameKernels } from '../kernels/frame-loans';
import { type FrameShape, ReadableFrameMaps } from '../kernels/frame-maps';
import type { FrameWasm } from '../kernels/frame-wasm';
import { ReadableJoint } from '../kernels/joint-distribution';
import {
  assertFramePart,
  type BlockSums,
  blockWindow,
  createTotals,
  type FramePart,
  type FrameTotals,
  frameKey,
  jointPixels,
  type Segment,
  totalNames,
} from './frame-part';
import { addEnds, scaleToMean } from './frame-tally';
import { addInto } from './pair-store';

/**
 * Consecutive-frame covariance of one range of frames, as maps. D_k = I_k - I_(k+1) of the unmasked pixels goes to the
 * block of frame k. With the end frames of every gapless stretch the totals are exact:
 *   sum_l [I_l I_l - sym(I_l I_(l+1))] = sum_k D_k D_k / 2 + (I_first I_first - I_last I_last)/2
 * (derived here). Ranges that are not neighbours may be merged: stretches join when the gap between them closes.
 *
 * Memory: whole maps in doubles for the totals, 16 (2H-1)(2W-1) bytes; 8 bytes per cell of the block window for every
 * touched block, 134 MB for 64 blocks of 256 x 256. Looks share the block maps, they do not copy them. The joint distribution
 * of a region of n pixels is summed in f32 (4 n^2 bytes) and kept in f64 (4 n^2 bytes), not block by block.
 */
export class FrameAccumulator {
  readonly kind = 'frames';
  readonly #spec: FrameSpec;
  readonly #shape: FrameShape;
  readonly #kernels: FrameWasm | null;
  #totals: FrameTotals | null = null;
  readonly #blocks = new Map<number, BlockSums>();
  /** Block maps that a tally has: to be copied before they grow. */
  readonly #shared = new Set<BlockSums>();
  /** In order of frames. */
  #segments: Segment[] = [];
  /** Kernels in use, and the stretch whose end they hold; its `lastImage` is behind. */
  #lent: FrameKernels | null = null;
  #readable: FrameKernels | null = null;
  /** Room for the region of the joint distribution. */
  readonly #inRegion: Float64Array;
  #running: Segment | null = null;
  /** Block whose differences the kernels sum, null when none. */
  #open: number | null = null;

  constructor(spec: FrameSpec, kernels: FrameWasm | null = null) {
    const { width, height, masked } = spec;
    this.#spec = spec;
    this.#kernels = kernels;
    this.#inRegion = new Float64Array(jointPixels(spec));
    this.#shape = {
      width,
      height,
      masked,
      offset: spec.offset ?? 0,
      threshold: spec.threshold ?? null,
      normalised: spec.normalised ?? false,
    };
  }

  /**
   * Takes the next frames, however many. A jump in the frame index starts a new stretch.
   * @throws Problem `bad-input` for another shape, a pixel that is not masked and holds no finite number, or a frame
   * without light that is to be normalised.
   */
  push(block: FrameBlock): void {
    if (block.kind !== 'frames') {
      throw new Problem(
        'bad-input',
        'Frames were expected but time tags were found; choose a stack of frames.',
      );
    }
    const { width, height } = this.#spec;
    if (block.width !== width || block.height !== height) {
      throw new Problem(
        'bad-input',
        `Frames of ${width} x ${height} were expected, ${block.width} x ${block.height} were found.`,
      );
    }
    for (let i = 0; i < block.count; i++) this.#append(block, i);
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
    this.#settle();
    const { width, height, masked, blocks } = this.#spec;
    const totals = structuredClone(this.#totals ?? createTotals(this.#spec));
    const tally: FrameTally = {
      kind: 'frames',
      width,
      height,
      frames: 0,
      differences: 0,
      masked: masked.slice(),
      ...totals,
      ...(this.#spec.jointRegion ? { jointRegion: { ...this.#spec.jointRegion } } : {}),
      blockFrames: new Float64Array(blocks),
      blockTotals: new Float64Array(blocks),
      blockDifferences: new Float64Array(blocks),
      blockWindow: blockWindow(this.#spec),
      blockPlus: Array.from({ length: blocks }, (_, b) => this.#shareBlock(b, 'plus')),
      blockMinus: Array.from({ length: blocks }, (_, b) => this.#shareBlock(b, 'minus')),
    };
    for (const [block, sums] of this.#blocks) {
      tally.frames += sums.frames;
      tally.differences += sums.differences;
      tally.blockFrames[block] = sums.frames;
      tally.blockTotals[block] = sums.frames > 0 ? sums.total / sums.frames : 0;
      tally.blockDifferences[block] = sums.differences;
    }
    addEnds(tally, this.#segments, () => this.#openKernels(null).maps);
    this.#settle();
    return this.#shape.normalised ? scaleToMean(tally) : tally;
  }

  /** A copy as plain data; its buffers may be transferred. */
  toPart(): FramePart {
    return structuredClone(this.#view());
  }

  /** Fills an accumulator that has counted nothing yet; the part's arrays become its own. */
  load(part: FramePart): void {
    this.#totals = part.totals;
    for (const { block, ...sums } of part.touched) this.#blocks.set(block, sums);
    this.#segments = part.segments;
  }

  /** All sums as they are, not copied. */
  #view(): FramePart {
    this.#settle();
    return {
      part: 2,
      kind: 'frames',
      key: frameKey(this.#spec),
      totals: this.#ownTotals(),
      touched: [...this.#blocks].map(([block, sums]) => ({ ...sums, block })),
      segments: this.#segments,
    };
  }

  #add(part: FramePart): void {
    this.#settle();
    const totals = this.#ownTotals();
    for (const name of totalNames) addInto(totals[name], part.totals[name]);
    if (totals.joint !== undefined && part.totals.joint !== undefined)
      addInto(totals.joint, part.totals.joint);
    for (const from of part.touched) {
      const to = this.#blockSums(from.block);
      to.frames += from.frames;
      to.total += from.total;
      to.differences += from.differences;
      this.#ownBlock(to);
      addSingle(to.plus, from.plus);
      addSingle(to.minus, from.minus);
    }
    // End images are overwritten as frames come, so they are copied.
    this.#segments.push(...structuredClone(part.segments));
    this.#joinSegments();
  }

  #append(block: FrameBlock, i: number): void {
    const { width, height } = this.#spec;
    const index = block.firstFrame + i;
    const segment = this.#segments.find(({ last }) => last + 1 === index);
    if (segment === undefined || segment !== this.#running) this.#leaveRun();
    const { maps } = this.#openKernels(segment === undefined ? null : this.#blockOf(index - 1));
    if (segment !== undefined && this.#running === null) {
      maps.resume(segment.lastImage);
      this.#takeRegion();
    }
    const { total, finite } = maps.take(block.pixels, i * width * height);
    if (!finite) throw notNumber(block, i, this.#spec);
    if (this.#shape.normalised && !(total > 0)) throw noLight(index, total);
    this.#takeRegion();
    const sums = this.#blockSums(this.#blockOf(index));
    sums.frames += 1;
    sums.total += total;
    if (segment === undefined) {
      const image = maps.last();
      this.#running = { first: index, last: index, firstImage: image, lastImage: image };
      this.#segments.push(this.#running);
      return;
    }
    this.#blockSums(this.#blockOf(index - 1)).differences += 1;
    segment.last = index;
    this.#running = segment;
  }

  /** The kernels, summing differences of `block`; null: whichever, as no difference comes next. */
  #openKernels(block: number | null): FrameKernels {
    if (block !== null && block !== this.#open) {
      this.#closeBlock();
      this.#open = block;
    }
    if (this.#lent === null) {
      const pixels = this.#inRegion.length;
      if (this.#kernels === null) {
        this.#readable ??= {
          maps: new ReadableFrameMaps(this.#shape),
          joint: pixels > 0 ? new ReadableJoint(pixels) : null,
        };
        this.#lent = this.#readable;
        this.#pause(this.#lent);
      } else this.#lent = borrowFrameKernels(this.#kernels, this.#shape, pixels, () => this.#settle());
    }
    return this.#lent;
  }

  #pause({ maps, joint }: FrameKernels): void {
    maps.pause();
    joint?.pause();
  }

  /** The image that the maps took last, to the joint distribution too. */
  #takeRegion(): void {
    const region = this.#spec.jointRegion ?? null;
    const lent = this.#lent;
    if (region === null || lent === null || lent.joint === null) return;
    lent.maps.lastIn(region, this.#inRegion);
    lent.joint.take(this.#inRegion, 0);
  }

  /** Brings the end of the running stretch up to date; the next frame begins another. */
  #leaveRun(): void {
    if (this.#running === null || this.#lent === null) return;
    this.#running.lastImage = this.#lent.maps.last();
    this.#running = null;
    this.#pause(this.#lent);
  }

  /** Brings the open block's differences to its maps. Maps add, so a block may be closed and opened at any time. */
  #closeBlock(): void {
    const block = this.#open;
    this.#open = null;
    if (block === null || this.#lent === null) return;
    const { width, height } = this.#spec;
    const closed = this.#lent.maps.close();
    const totals = this.#ownTotals();
    addInto(totals.plus, closed.plus);
    addInto(totals.minus, closed.minus);
    addInto(totals.diagonal, closed.diagonal);
    const wide = 2 * width - 1;
    for (let y = 0; y < height; y++) {
      for (let x = 0; x < width; x++) {
        closed.plus[2 * y * wide + 2 * x]! -= closed.diagonal[y * width + x]!;
      }
    }
    const sums = this.#blockSums(block);
    this.#ownBlock(sums);
    const window = blockWindow(this.#spec);
    for (let y = 0; y < window.ny; y++) {
      const from = (window.y + y) * wide + window.x;
      const to = y * window.nx;
      for (let x = 0; x < window.nx; x++) {
        sums.plus[to + x]! += closed.plus[from + x]!;
        sums.minus[to + x]! += closed.minus[from + x]!;
      }
    }
  }

  /** Takes everything out of the kernels and gives them back. */
  #settle(): void {
    if (this.#lent === null) return;
    this.#leaveRun();
    this.#closeBlock();
    const totals = this.#ownTotals();
    this.#lent.maps.drain(totals);
    if (totals.joint !== undefined) this.#lent.joint?.drain(totals.joint);
    this.#lent = null;
    if (this.#kernels !== null) returnFrameKernels(this.#kernels);
  }

  #joinSegments(): void {
    this.#segments.sort((a, b) => a.first - b.first);
    const joined: Segment[] = [];
    for (const segment of this.#segments) {
      const before = joined[joined.length - 1];
      if (before !== undefined && before.last + 1 === segment.first) {
        this.#addSeam(before, segment);
        before.last = segment.last;
        before.lastImage = segment.lastImage;
      } else {
        joined.push(segment);
      }
    }
    this.#segments = joined;
  }

  /** The difference across a seam, brought down at once: sums must not depend on when somebody looked. */
  #addSeam(before: Segment, after: Segment): void {
    this.#settle();
    const block = this.#blockOf(before.last);
    const { maps } = this.#openKernels(block);
    maps.resume(before.lastImage);
    this.#takeRegion();
    maps.follow(after.firstImage);
    this.#takeRegion();
    this.#blockSums(block).differences += 1;
    this.#settle();
  }

  #blockOf(frame: number): number {
    const { frames, blocks } = this.#spec;
    return Math.max(0, Math.min(blocks - 1, Math.floor((frame * blocks) / frames)));
  }

  #ownTotals(): FrameTotals {
    this.#totals ??= createTotals(this.#spec);
    return this.#totals;
  }

  #blockSums(block: number): BlockSums {
    const found = this.#blocks.get(block);
    if (found !== undefined) return found;
    const { nx, ny } = blockWindow(this.#spec);
    const sums: BlockSums = {
      frames: 0,
      total: 0,
      differences: 0,
      plus: new Float32Array(nx * ny),
      minus: new Float32Array(nx * ny),
    };
    this.#blocks.set(block, sums);
    return sums;
  }

  #shareBlock(block: number, name: 'plus' | 'minus'): Float32Array | null {
    const sums = this.#blocks.get(block);
    if (sums === undefined || sums.differences === 0) return null;
    this.#shared.add(sums);
    return sums[name];
  }

  #ownBlock(sums: BlockSums): void {
    if (!this.#shared.delete(sums)) return;
    sums.plus = sums.plus.slice();
    sums.minus = sums.minus.slice();
  }
}

function addSingle(to: Float32Array, from: Float32Array): void {
  for (let i = 0; i < to.length; i++) to[i]! += from[i]!;
}

/** Names the first pixel of a frame whose square is not a finite number. */
function notNumber(block: FrameBlock, i: number, { width, height, masked }: FrameSpec): Problem {
  const pixels = block.pixels.subarray(i * width * height, (i + 1) * width * height);
  const at = pixels.findIndex((value, p) => masked[p] === 0 && !Number.isFinite(value * value));
  const x = at % width;
  const y = Math.floor(at / width);
  const frame = block.firstFrame + i;
  return new Problem(
    'bad-input',
    `Frame ${frame} holds ${pixels[at]} at pixel (${x}, ${y}), where a finite number was expected; mask pixel ${at} in the detector map, or write numbers in its place.`,
    `frame ${frame}, pixel (${x}, ${y})`,
  );
}

function noLight(frame: number, total: number): Problem {
  return new Problem(
    'bad-input',
    `Frame ${frame} has a total of ${total}, and frames can only be scaled to the mean total where there is light in each; switch the normalisation off, or correct offset and threshold.`,
    `frame ${frame}`,
  );
}

export function createFrameAccumulator(spec: FrameSpec, kernels: FrameWasm | null = null): FrameAccumulator {
  return new FrameAccumulator(spec, kernels);
}

/** @throws Problem `newer-version` for a part of a later engine, `bad-input` for one of another stack. */
export function frameAccumulatorFromPart(
  spec: FrameSpec,
  part: FramePart,
  kernels: FrameWasm | null = null,
): FrameAccumulator {
  assertFramePart(spec, part);
  const accumulator = new FrameAccumulator(spec, kernels);
  accumulator.load(part);
  return accumulator;
}
