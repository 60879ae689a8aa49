import type { PixelArray } from '../../shared/contracts/blocks';
import { CELL, pairLimit, placeArrays, SKEW, SQUARES } from './frame-arrays-wasm';
import {
  copyRectangle,
  type DifferenceSums,
  type FrameLight,
  type FrameMaps,
  type FrameShape,
  type PixelSums,
  type Rectangle,
} from './frame-maps';
import { normalisation } from './frame-sums';
import { compiledLength } from './frame-transform-tables';
import type { FrameWasm } from './frame-wasm';

/** Differences summed in f32 before they go to f64. */
const FLUSH = 64;

/**
 * Compiled twin of `ReadableFrameMaps`. Frames gather in slots; a full batch is summed and transformed at once. A batch in
 * which every frame has few lit pixels (`pairLimit`), all small whole numbers, is counted pair by pair instead, exactly.
 *
 * Precision. Differences are exact: slots are f32 where that holds every value (8- and 16-bit pixels, f32 pixels, whole
 * offsets), else f64. The transform is f32, up to 64 squares are added in f32, all further sums and the one inverse
 * transform of `close` are f64: maps come within 1e-6 of their largest value of the f64 twin (2e-7 typical); pixel sums,
 * diagonal and projections within 1e-12.
 *
 * Any frame: sides are padded to powers of two from twice their size less one, so 256 -> 512, 257 -> 1024, each side for
 * itself. O(P log P) a frame for P = padWidth * padHeight; memory 70 to 115 bytes a padded pixel.
 */
export class CompiledFrameMaps implements FrameMaps {
  readonly #wasm: FrameWasm;
  readonly #mark: number;
  readonly #shape: FrameShape;
  readonly #open: number;
  readonly #columns: number;
  readonly #padWidth: number;
  readonly #padHeight: number;
  readonly #strips: number;
  readonly #stripBytes: number;
  readonly #frameBytes: number;
  readonly #batch: number;
  readonly #at: ReturnType<typeof placeArrays>;
  /** Slots hold f64. Turns true with the first pixels that need it, and stays so. */
  #double: boolean;
  /** Slots filled: a run of this many frames, its first one counted already unless `fresh`. */
  #filled = 0;
  #fresh = false;
  /** Differences in the f32 sums. */
  #unflushed = 0;
  /** Squares of spectra wait for the inverse transform. */
  #transformed = false;
  /** Lit pixels of the slots, and the most of them for which pairs are counted. */
  readonly #lit: { count: number; squares: number; ones: number }[];
  readonly #limit: number;
  /** No bin of the pair maps holds more. */
  #mostInPairs = 0;
  /** The maps were handed out and are to be cleared before they grow. */
  #closed = false;

  constructor(wasm: FrameWasm, shape: FrameShape) {
    const { width, height } = shape;
    this.#wasm = wasm;
    this.#mark = wasm.mark;
    this.#shape = shape;
    this.#open = shape.masked.reduce((n, m) => n + 1 - m, 0);
    this.#columns = Math.ceil(width / 4) * 4;
    this.#padWidth = compiledLength(width);
    this.#padHeight = compiledLength(height);
    this.#strips = this.#padHeight / 8 + 1;
    this.#stripBytes = (this.#padWidth / 2) * CELL + SKEW / 2;
    this.#frameBytes = this.#strips * this.#stripBytes;
    this.#batch = Math.max(2, Math.min(8, 2 * Math.floor(2 ** 19 / (width * height))));
    this.#lit = Array.from({ length: this.#batch + 1 }, () => ({ count: 0, squares: 0, ones: 0 }));
    this.#limit = pairLimit(this.#padWidth, this.#padHeight);
    this.#double = shape.normalised || !Number.isInteger(shape.offset);
    this.#at = placeArrays(wasm, {
      shape,
      columns: this.#columns,
      padWidth: this.#padWidth,
      padHeight: this.#padHeight,
      strips: this.#strips,
      frameBytes: this.#frameBytes,
      batch: this.#batch,
      limit: this.#limit,
    });
  }

  take(pixels: PixelArray, start: number): FrameLight {
    const { width, height, offset, threshold, normalised } = this.#shape;
    const type = typeOf(pixels);
    if (!this.#double && (type >= FIRST_WIDE || (type === FLOAT && offset !== 0))) this.#widen();
    const bytes = pixels.BYTES_PER_ELEMENT;
    const from = pixels.byteOffset + start * bytes;
    const raw = this.#wasm.u8(this.#at.raw, width * height * bytes);
    raw.set(new Uint8Array(pixels.buffer, from, raw.length));
    if (this.#filled === 0) this.#fresh = true;
    const slot = this.#slot(this.#filled);
    const total = this.#wasm.call.prepareFrame(
      type,
      this.#at.raw,
      width,
      height,
      this.#columns,
      this.#at.mask,
      slot,
      this.#double ? 1 : 0,
      offset,
      threshold === null ? 0 : 1,
      threshold ?? 0,
      this.#at.scratch,
    );
    const squares = this.#wasm.f64(this.#at.scratch, 1)[0]!;
    if (normalised)
      this.#wasm.call.scaleFrame(slot, this.#columns * height, normalisation(total, this.#open));
    this.#advance();
    return { total, finite: Number.isFinite(squares) };
  }

  resume(image: Float64Array): void {
    this.#run();
    this.#filled = 0;
    this.#fresh = false;
    this.#put(image, 0);
    this.#filled = 1;
  }

  follow(image: Float64Array): void {
    // Sums count every frame but the first of a batch, so this one goes in alone and is taken off again.
    this.#run();
    this.#put(image, this.#filled);
    this.#filled += 1;
    this.#transform(false);
  }

  pause(): void {
    this.#run();
    this.#filled = 0;
  }

  addProduct(x: Float64Array, y: Float64Array): void {
    this.pause();
    const at = this.#at;
    // Differences with a frame of zeros between: x - 0 and 0 - (-y).
    this.#put(x, 0);
    this.#put(
      y.map((v) => -v),
      2,
    );
    // The second may have turned the slots to f64.
    this.#put(x, 0);
    this.#wasm.u8(this.#slot(1), at.slotBytes).fill(0);
    this.#transformPair(this.#slot(0), this.#slot(1), this.#slot(2), at.half);
    this.#wasm.call.addProduct(
      at.half,
      this.#strips,
      this.#padWidth,
      at.twiddlesX,
      at.work,
      at.other,
      at.squares,
      this.#stripBytes,
      this.#frameBytes,
    );
    this.#unflushed += 1;
    this.#transformed = true;
  }

  last(): Float64Array {
    const { width, height } = this.#shape;
    const slot = this.#slot(this.#filled - 1);
    const length = this.#columns * height;
    const image = this.#double ? this.#wasm.f64(slot, length) : this.#wasm.f32(slot, length);
    const out = new Float64Array(width * height);
    for (let y = 0; y < height; y++) {
      for (let x = 0; x < width; x++) out[y * width + x] = image[y * this.#columns + x]!;
    }
    return out;
  }

  lastIn(region: Rectangle, out: Float64Array): void {
    const slot = this.#slot(this.#filled - 1);
    const length = this.#columns * this.#shape.height;
    const image = this.#double ? this.#wasm.f64(slot, length) : this.#wasm.f32(slot, length);
    copyRectangle(image, this.#columns, region, out);
  }

  close(): DifferenceSums {
    this.#run();
    this.#flush();
    this.#clearClosed();
    this.#flushPairs();
    if (this.#transformed) this.#invert();
    this.#closed = true;
    const { width, height } = this.#shape;
    const cells = (2 * width - 1) * (2 * height - 1);
    const diagonal = new Float64Array(width * height);
    this.#moveImage(this.#at.diagonal, diagonal);
    const { plus, minus } = this.#at;
    return { plus: this.#wasm.f64(plus, cells), minus: this.#wasm.f64(minus, cells), diagonal };
  }

  #invert(): void {
    const { width, height } = this.#shape;
    const at = this.#at;
    // Spectra of pairs come doubled, squares fourfold; 1/2 is the estimator's.
    const scale = 0.5 / (4 * this.#padWidth * this.#padHeight);
    this.#wasm.call.invertSquares(
      at.totals,
      width,
      height,
      this.#padWidth,
      this.#padHeight,
      at.twiddlesX64,
      at.twiddlesY64,
      at.positionsX,
      at.positionsY,
      at.work,
      at.field,
      at.plus,
      at.minus,
      scale,
    );
    this.#wasm.f64(at.totals, this.#strips * this.#padWidth * 12).fill(0);
    this.#transformed = false;
  }

  drain(into: PixelSums): void {
    this.#run();
    this.#moveImage(this.#at.sum, into.sum);
    this.#moveImage(this.#at.sumSquares, into.sumSquares);
    this.#moveJoint(this.#at.jointX, this.#shape.width, into.jointX);
    this.#moveJoint(this.#at.jointY, this.#shape.height, into.jointY);
  }

  /** Gives the arrays back to the module; nothing may be called afterwards. */
  dispose(): void {
    this.#wasm.release(this.#mark);
  }

  #slot(index: number): number {
    return this.#at.slots + index * this.#at.slotBytes;
  }

  #put(image: Float64Array, index: number): void {
    const { width, height } = this.#shape;
    if (!this.#double && !image.every((value) => Math.fround(value) === value)) this.#widen();
    const length = this.#columns * height;
    const at = this.#slot(index);
    const slot = this.#double ? this.#wasm.f64(at, length) : this.#wasm.f32(at, length);
    for (let y = 0; y < height; y++) {
      for (let x = 0; x < width; x++) slot[y * this.#columns + x] = image[y * width + x]!;
    }
  }

  #advance(): void {
    this.#filled += 1;
    if (this.#filled > this.#batch) this.#run();
  }

  /** Sums and transforms what the slots hold, and leaves the last frame in the first slot. */
  #run(): void {
    if (this.#filled > 1 || this.#fresh) this.#transform(true);
  }

  #transform(counted: boolean): void {
    const { height } = this.#shape;
    const { call } = this.#wasm;
    const at = this.#at;
    const count = this.#filled - 1;
    const listed = count > 0 && !this.#double && this.#list(count);
    const sum = counted ? at.sum : at.spare;
    const sumSquares = counted ? at.sumSquares : at.spare;
    if (listed) this.#addPairs(count, sum, sumSquares);
    else
      call.addSums(
        this.#double ? 1 : 0,
        at.slots,
        at.slotBytes,
        this.#fresh ? 0 : 1,
        count,
        this.#columns,
        height,
        sum,
        sumSquares,
        at.diagonal,
        at.across,
        at.down,
        at.downBytes,
        at.scratch,
      );
    if (count > 0) {
      call.addOuters(at.across, count, this.#columns, at.jointX);
      call.addOuters(at.down, count, at.downBytes / 8, at.jointY);
      if (!listed) this.#addTransforms(count);
      const bytes = this.#columns * height * (this.#double ? 8 : 4);
      this.#wasm.u8(this.#slot(0), bytes).set(this.#wasm.u8(this.#slot(count), bytes));
    }
    this.#filled = 1;
    this.#fresh = false;
  }

  /** Lists the lit pixels of all slots; false where one has too many, or another number than a small whole one. */
  #list(count: number): boolean {
    const { height } = this.#shape;
    const { call } = this.#wasm;
    const { lists, listBytes, pad, scratch, slots, slotBytes } = this.#at;
    for (let k = 0; k <= count; k++) {
      const lit = this.#lit[k]!;
      const slot = slots + k * slotBytes;
      lit.count = call.listLit(
        slot,
        this.#columns,
        height,
        pad,
        this.#limit,
        lists + k * listBytes,
        listBytes / 3,
        scratch,
      );
      if (lit.count < 0) return false;
      lit.squares = this.#wasm.f64(scratch, 1)[0]!;
      if (mostAdded(lit.squares) > MOST_IN_PAIRS) return false;
      lit.ones = this.#wasm.i32(scratch, 3)[2]!;
    }
    return true;
  }

  #addPairs(count: number, sum: number, sumSquares: number): void {
    const { call } = this.#wasm;
    const at = this.#at;
    this.#wasm.u8(at.across, count * this.#columns * 8).fill(0);
    this.#wasm.u8(at.down, count * at.downBytes).fill(0);
    const span = at.listBytes / 3;
    for (let k = 0; k <= count; k++) {
      const list = at.lists + k * at.listBytes;
      const lit = this.#lit[k]!;
      const most = mostAdded(Math.max(lit.squares, this.#lit[k + 1]?.squares ?? 0));
      if (this.#mostInPairs + most > MOST_IN_PAIRS) this.#flushPairs();
      this.#mostInPairs += most;
      call.addOwnPairs(list, lit.count, span, k === 0 || k === count ? 1 : 2, lit.ones, at.pairs, at.middle);
      if (k === count) break;
      const next = this.#lit[k + 1]!;
      call.takeCrossPairs(
        list,
        lit.count,
        list + at.listBytes,
        next.count,
        span,
        lit.ones & next.ones,
        at.pairs,
        at.middle,
      );
      call.addListSums(
        list,
        lit.count,
        list + at.listBytes,
        next.count,
        span,
        this.#slot(k),
        k === 0 && this.#fresh ? 1 : 0,
        this.#columns,
        sum,
        sumSquares,
        at.diagonal,
        at.across + k * this.#columns * 8,
        at.down + k * at.downBytes,
      );
    }
  }

  #flushPairs(): void {
    if (this.#mostInPairs === 0) return;
    const { width, height } = this.#shape;
    const { pairs, middle, pairsBytes, pad, plus, minus } = this.#at;
    this.#clearClosed();
    this.#wasm.call.flushPairs(pairs, middle, pairsBytes, width, height, pad, plus, minus);
    this.#mostInPairs = 0;
  }

  /** What `close` handed out is added to from now on. */
  #clearClosed(): void {
    if (!this.#closed) return;
    const { width, height } = this.#shape;
    const cells = (2 * width - 1) * (2 * height - 1);
    this.#wasm.f64(this.#at.plus, cells).fill(0);
    this.#wasm.f64(this.#at.minus, cells).fill(0);
    this.#closed = false;
  }

  #addTransforms(count: number): void {
    const { call } = this.#wasm;
    const at = this.#at;
    for (let k = 0; k < count; k += 2) {
      const second = this.#slot(k + 1);
      // An odd difference out has the difference of a frame with itself beside it.
      const third = k + 1 < count ? this.#slot(k + 2) : second;
      this.#transformPair(this.#slot(k), second, third, at.half + k * this.#frameBytes);
    }
    call.addSquares(
      at.half,
      count,
      this.#strips,
      this.#padWidth,
      at.twiddlesX,
      at.work,
      at.squares,
      this.#stripBytes,
      this.#frameBytes,
    );
    this.#unflushed += count;
    if (this.#unflushed >= FLUSH) this.#flush();
    this.#transformed = true;
  }

  #transformPair(first: number, second: number, third: number, to: number): void {
    const { call } = this.#wasm;
    const { twiddlesY, positionsY, work } = this.#at;
    const transform = this.#double ? call.transformColumnsF64 : call.transformColumnsF32;
    transform(
      first,
      second,
      third,
      this.#columns,
      this.#padHeight,
      twiddlesY,
      positionsY,
      work,
      to,
      this.#stripBytes,
      this.#frameBytes,
    );
  }

  #flush(): void {
    if (this.#unflushed === 0) return;
    const n = this.#strips * this.#padWidth * (SQUARES / 4);
    this.#wasm.call.flushSquares(this.#at.squares, this.#at.totals, n);
    this.#unflushed = 0;
  }

  #widen(): void {
    this.#run();
    const last = this.#filled > 0 ? this.last() : null;
    this.#double = true;
    this.#wasm.u8(this.#at.slots, (this.#batch + 1) * this.#at.slotBytes).fill(0);
    if (last !== null) this.#put(last, 0);
  }

  /** Adds a padded image to a plain one and clears it. */
  #moveImage(from: number, into: Float64Array): void {
    const { width, height } = this.#shape;
    const image = this.#wasm.f64(from, this.#columns * height);
    for (let y = 0; y < height; y++) {
      for (let x = 0; x < width; x++) into[y * width + x]! += image[y * this.#columns + x]!;
    }
    image.fill(0);
  }

  /** Of the compiled sums only the upper triangle is complete. */
  #moveJoint(from: number, n: number, into: Float64Array): void {
    const stride = Math.ceil(n / 4) * 4;
    const joint = this.#wasm.f64(from, stride * stride);
    for (let j = 0; j < n; j++) {
      for (let i = j; i < n; i++) {
        into[j * n + i]! += joint[j * stride + i]!;
        if (i > j) into[i * n + j]! += joint[j * stride + i]!;
      }
    }
    joint.fill(0);
  }
}

/** What a bin of i32 may hold. */
const MOST_IN_PAIRS = 2 ** 31 - 1;

/** By how much a frame changes a bin at most: 4 sum x(i) x(j) of its own and 2 sum x(i) y(j), each at most the squares. */
function mostAdded(squares: number): number {
  return 6 * squares;
}

/** Types from this one on need f64. */
const FIRST_WIDE = 5;
const FLOAT = 4;

function typeOf(pixels: PixelArray): number {
  if (pixels instanceof Uint8Array) return 0;
  if (pixels instanceof Int8Array) return 1;
  if (pixels instanceof Uint16Array) return 2;
  if (pixels instanceof Int16Array) return 3;
  if (pixels instanceof Float32Array) return FLOAT;
  if (pixels instanceof Uint32Array) return 5;
  if (pixels instanceof Int32Array) return 6;
  return 7;
}
