import type { PixelArray } from '../../shared/contracts/blocks';
import type { DifferenceSums, FrameLight, FrameMaps, FrameShape, PixelSums } from './frame-maps';
import { normalisation } from './frame-sums';
import { compiledLength, digitReversed, twiddles } from './frame-transform-tables';
import type { FrameWasm } from './frame-wasm';

/** A value of a column of transforms: {re, im} of four f32 (two f64) columns. */
const CELL = 32;
/** Re^2 - Im^2, Re Im, |F|^2 of four columns in f32, and in f64. */
const SQUARES = 48;
/** Distances that are powers of two would put the same row of all frames into the same cache set. */
const SKEW = 128;
/** Differences summed in f32 before they go to f64. */
const FLUSH = 64;

/**
 * Compiled twin of `ReadableFrameMaps`. Frames gather in slots; a full batch is summed and transformed at once.
 *
 * Precision. Differences are exact: slots are f32 where that holds every value (8- and 16-bit pixels, f32 pixels, whole
 * offsets), else f64. The transform is f32, up to 64 squares are added in f32, all further sums and the one inverse
 * transform of `close` are f64: maps come within 1e-6 of their largest value of the f64 twin (2e-7 typical); pixel sums,
 * diagonal and projections within 1e-12.
 *
 * Any frame: sides are padded to powers of two from twice their size less one, so 256 -> 512, 257 -> 1024, each side for
 * itself. O(P log P) a frame for P = padWidth * padHeight; memory 75 to 105 bytes a padded pixel.
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
    this.#double = shape.normalised || !Number.isInteger(shape.offset);
    this.#at = placeArrays(wasm, {
      shape,
      columns: this.#columns,
      padWidth: this.#padWidth,
      padHeight: this.#padHeight,
      strips: this.#strips,
      frameBytes: this.#frameBytes,
      batch: this.#batch,
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

  close(): DifferenceSums {
    this.#run();
    this.#flush();
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
    const cells = (2 * width - 1) * (2 * height - 1);
    this.#wasm.f64(at.totals, this.#strips * this.#padWidth * 12).fill(0);
    const diagonal = new Float64Array(width * height);
    this.#moveImage(at.diagonal, diagonal);
    return { plus: this.#wasm.f64(at.plus, cells), minus: this.#wasm.f64(at.minus, cells), diagonal };
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
    const sum = counted ? at.sum : at.spare;
    const sumSquares = counted ? at.sumSquares : at.spare;
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
      const transform = this.#double ? call.transformColumnsF64 : call.transformColumnsF32;
      for (let k = 0; k < count; k += 2) {
        const second = this.#slot(k + 1);
        transform(
          this.#slot(k),
          second,
          // An odd difference out has the difference of a frame with itself beside it.
          k + 1 < count ? this.#slot(k + 2) : second,
          this.#columns,
          this.#padHeight,
          at.twiddlesY,
          at.positionsY,
          at.work,
          at.half + k * this.#frameBytes,
          this.#stripBytes,
          this.#frameBytes,
        );
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
      const bytes = this.#columns * height * (this.#double ? 8 : 4);
      this.#wasm.u8(this.#slot(0), bytes).set(this.#wasm.u8(this.#slot(count), bytes));
    }
    this.#filled = 1;
    this.#fresh = false;
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

interface Sizes {
  shape: FrameShape;
  columns: number;
  padWidth: number;
  padHeight: number;
  strips: number;
  frameBytes: number;
  batch: number;
}

/** Places every array and fills the tables. What `release` gave back is not zero, so all that must be is cleared. */
function placeArrays(wasm: FrameWasm, sizes: Sizes) {
  const { shape, columns, padWidth, padHeight, strips, frameBytes, batch } = sizes;
  const { width, height } = shape;
  const from = wasm.mark;
  const image = columns * height;
  const downBytes = Math.ceil(height / 4) * 32;
  // Rows below the image are read as zeros up to half the padded height.
  const slotBytes = (padHeight / 2) * columns * 8 + SKEW;
  const cells = (2 * width - 1) * (2 * height - 1);
  const at = {
    scratch: wasm.place(16 * batch),
    raw: wasm.place(width * height * 8 + 64),
    mask: wasm.place(4 * image),
    slots: wasm.place((batch + 1) * slotBytes),
    slotBytes,
    sum: wasm.place(8 * image),
    sumSquares: wasm.place(8 * image),
    spare: wasm.place(8 * image),
    diagonal: wasm.place(8 * image),
    across: wasm.place(batch * columns * 8),
    down: wasm.place(batch * downBytes),
    downBytes,
    jointX: wasm.place(columns * columns * 8),
    jointY: wasm.place((downBytes / 8) ** 2 * 8),
    twiddlesX: wasm.place(16 * padWidth),
    twiddlesY: wasm.place(16 * padHeight),
    twiddlesX64: wasm.place(32 * padWidth),
    twiddlesY64: wasm.place(32 * padHeight),
    positionsX: wasm.place(4 * padWidth),
    positionsY: wasm.place(4 * padHeight),
    work: wasm.place(Math.max(padWidth, padHeight) * CELL),
    half: wasm.place((batch + 1) * frameBytes),
    squares: wasm.place(strips * padWidth * SQUARES),
    totals: wasm.place(strips * padWidth * 2 * SQUARES),
    field: wasm.place((padWidth / 2) * padHeight * CELL),
    plus: wasm.place(8 * cells),
    minus: wasm.place(8 * cells),
  };
  wasm.u8(from, wasm.mark - from).fill(0);
  const mask = wasm.i32(at.mask, image);
  for (let y = 0; y < height; y++) {
    for (let x = 0; x < width; x++) mask[y * columns + x] = shape.masked[y * width + x] === 0 ? -1 : 0;
  }
  for (const [single, double, positions, n] of [
    [at.twiddlesX, at.twiddlesX64, at.positionsX, padWidth],
    [at.twiddlesY, at.twiddlesY64, at.positionsY, padHeight],
  ] as const) {
    const table = twiddles(n);
    wasm.f32(single, table.length).set(table);
    wasm.f64(double, table.length).set(table);
    const places = wasm.u32(positions, n);
    for (let k = 0; k < n; k++) places[k] = CELL * digitReversed(k, n);
  }
  return at;
}

interface Loan {
  key: string;
  maps: CompiledFrameMaps;
  /** Null: nobody uses them. */
  handBack: (() => void) | null;
}

/** One set of arrays a module: they are large, and a worker counts one range at a time. */
const loans = new WeakMap<FrameWasm, Loan>();

/**
 * The module's frame maps, empty. Whoever had them is asked by its `handBack` to close and drain them first, and must
 * then forget them.
 */
export function borrowFrameMaps(wasm: FrameWasm, shape: FrameShape, handBack: () => void): CompiledFrameMaps {
  const before = loans.get(wasm);
  before?.handBack?.();
  const key = [
    shape.width,
    shape.height,
    shape.offset,
    shape.threshold,
    shape.normalised,
    shape.masked,
  ].join();
  let maps = before?.maps;
  if (maps === undefined || before?.key !== key) {
    maps?.dispose();
    maps = new CompiledFrameMaps(wasm, shape);
  }
  maps.pause();
  loans.set(wasm, { key, maps, handBack });
  return maps;
}

/** To be called by a borrower that has closed and drained the maps of its own accord. */
export function returnFrameMaps(wasm: FrameWasm): void {
  const loan = loans.get(wasm);
  if (loan !== undefined) loan.handBack = null;
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
