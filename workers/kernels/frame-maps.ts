import type { PixelArray } from '../../shared/contracts/blocks';
import { FrameSpectra } from './frame-spectra';
import { addDiagonal, addOuter, type FrameTreatment, projectFrame, subtract, takeFrame } from './frame-sums';

/** Frames of one size, their mask and what is done to every pixel before it counts. */
export interface FrameShape extends FrameTreatment {
  width: number;
  height: number;
  /** height*width, 1 where masked. */
  masked: Uint8Array;
}

/** Both ends included. */
export interface Rectangle {
  x0: number;
  y0: number;
  x1: number;
  y1: number;
}

export interface FrameLight {
  /** After offset, threshold and mask, before it is normalised. */
  total: number;
  /** False where an unmasked pixel or its square is no finite number; then neither are the sums any more. */
  finite: boolean;
}

/** Sums over the differences D of a block, each times 1/2; i = j included. */
export interface DifferenceSums {
  /** (2H-1)*(2W-1), as `FrameSpectra` has them. */
  plus: Float64Array;
  minus: Float64Array;
  /** height*width. */
  diagonal: Float64Array;
}

export interface PixelSums {
  sum: Float64Array;
  sumSquares: Float64Array;
  /** sum of D D / 2 of the projections: width*width and height*height. */
  jointX: Float64Array;
  jointY: Float64Array;
}

/**
 * Frames go in one by one, consecutive ones in a run; out come sums over frames and over differences of consecutive
 * frames of a run. Implemented readably here (`ReadableFrameMaps`, all in f64) and compiled (`CompiledFrameMaps`).
 */
export interface FrameMaps {
  /** The next frame of the run, at `start` of `pixels`. */
  take(pixels: PixelArray, start: number): FrameLight;
  /** The next frame follows this prepared image, which is counted already. */
  resume(image: Float64Array): void;
  /** As `take` for a prepared image that is counted already: only its difference counts. */
  follow(image: Float64Array): void;
  /** The next frame begins a run. */
  pause(): void;
  /** Adds x y / 2, symmetrised, to the maps of the block, not to its diagonal; a run ends with it. */
  addProduct(x: Float64Array, y: Float64Array): void;
  /** Prepared image taken last, a copy. */
  last(): Float64Array;
  /** Its pixels in a rectangle, row by row, into the caller's array. */
  lastIn(region: Rectangle, out: Float64Array): void;
  /** Sums of the differences since the last call; valid until the next call of anything. */
  close(): DifferenceSums;
  /** Adds all else since the last call to the caller's arrays. */
  drain(into: PixelSums): void;
}

/** The compiled kernels' twin: one transform in f64 for two differences, everything else as loops. */
export class ReadableFrameMaps implements FrameMaps {
  readonly #shape: FrameShape;
  readonly #spectra: FrameSpectra;
  readonly #sums: PixelSums;
  readonly #block: DifferenceSums;
  readonly #columns: Float64Array;
  readonly #rows: Float64Array;
  #before: Float64Array;
  #incoming: Float64Array;
  #difference: Float64Array;
  #waitingDifference: Float64Array;
  /** Whether `before` holds the frame before the next one. */
  #running = false;
  /** A difference waits for a second one to share its transform. */
  #waiting = false;

  constructor(shape: FrameShape) {
    const { width, height } = shape;
    const pixels = width * height;
    const cells = (2 * width - 1) * (2 * height - 1);
    this.#shape = shape;
    this.#spectra = new FrameSpectra(width, height);
    this.#sums = {
      sum: new Float64Array(pixels),
      sumSquares: new Float64Array(pixels),
      jointX: new Float64Array(width * width),
      jointY: new Float64Array(height * height),
    };
    this.#block = {
      plus: new Float64Array(cells),
      minus: new Float64Array(cells),
      diagonal: new Float64Array(pixels),
    };
    this.#columns = new Float64Array(width);
    this.#rows = new Float64Array(height);
    this.#before = new Float64Array(pixels);
    this.#incoming = new Float64Array(pixels);
    this.#difference = new Float64Array(pixels);
    this.#waitingDifference = new Float64Array(pixels);
  }

  take(pixels: PixelArray, start: number): FrameLight {
    const { sum, sumSquares } = this.#sums;
    const light = takeFrame(pixels, start, this.#shape, this.#incoming, sum, sumSquares);
    this.#push();
    return light;
  }

  resume(image: Float64Array): void {
    this.#before.set(image);
    this.#running = true;
  }

  follow(image: Float64Array): void {
    this.#incoming.set(image);
    this.#push();
  }

  pause(): void {
    this.#running = false;
  }

  addProduct(x: Float64Array, y: Float64Array): void {
    this.pause();
    this.#spectra.addProduct(x, y);
  }

  last(): Float64Array {
    return this.#before.slice();
  }

  lastIn(region: Rectangle, out: Float64Array): void {
    copyRectangle(this.#before, this.#shape.width, region, out);
  }

  close(): DifferenceSums {
    if (this.#waiting) this.#spectra.addSquares(this.#waitingDifference, null);
    this.#waiting = false;
    const { plus, minus, diagonal } = this.#block;
    plus.fill(0);
    minus.fill(0);
    this.#spectra.moveTo(plus, minus, 0.5);
    const closed = { plus, minus, diagonal: diagonal.slice() };
    diagonal.fill(0);
    return closed;
  }

  drain(into: PixelSums): void {
    for (const key of ['sum', 'sumSquares', 'jointX', 'jointY'] as const) {
      const from = this.#sums[key];
      const to = into[key];
      for (let i = 0; i < from.length; i++) to[i]! += from[i]!;
      from.fill(0);
    }
  }

  /** Adds the difference of `before` and `incoming`, and exchanges them. */
  #push(): void {
    if (this.#running) this.#addDifference();
    const free = this.#before;
    this.#before = this.#incoming;
    this.#incoming = free;
    this.#running = true;
  }

  #addDifference(): void {
    const difference = this.#difference;
    subtract(this.#before, this.#incoming, difference);
    addDiagonal(difference, difference, 0.5, this.#block.diagonal);
    projectFrame(difference, this.#columns, this.#rows);
    addOuter(this.#columns, this.#columns, 0.5, this.#sums.jointX);
    addOuter(this.#rows, this.#rows, 0.5, this.#sums.jointY);
    if (this.#waiting) {
      this.#spectra.addSquares(this.#waitingDifference, difference);
      this.#waiting = false;
      return;
    }
    this.#difference = this.#waitingDifference;
    this.#waitingDifference = difference;
    this.#waiting = true;
  }
}

/** Pixels of a rectangle of an image of `columns` values a row, row by row. */
export function copyRectangle(
  image: Float64Array | Float32Array,
  columns: number,
  { x0, y0, x1, y1 }: Rectangle,
  out: Float64Array,
): void {
  let to = 0;
  for (let y = y0; y <= y1; y++) {
    for (let x = x0; x <= x1; x++) out[to++] = image[y * columns + x]!;
  }
}
