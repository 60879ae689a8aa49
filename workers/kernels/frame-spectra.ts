import FFT from 'fft.js';

/** Strips of rows transposed together: a strip of complex values of one column fills two cache lines. */
const STRIP = 8;

/** Smallest power of two (at least 2, the shortest transform) that holds all lags of `n` samples: 256 -> 512. */
export function paddedLength(n: number): number {
  let length = 2;
  while (length < 2 * n - 1) length *= 2;
  return length;
}

/**
 * Sums of sum- and difference-coordinate maps of real images x, y:
 *   plus(s)  = sum_i x(i) y(s - i)                      (2H-1)*(2W-1), index s
 *   minus(d) = sum_i [x(i) y(i + d) + y(i) x(i + d)]/2  (2H-1)*(2W-1), index d + (H-1, W-1)
 * taken as spectra (convolution and correlation theorems; derived here) and transformed back once, by `moveTo`.
 *
 * Two real images share one complex transform: z = x1 + i x2 with spectrum Z, and Zm(k) = Z(-k). Then
 *   F1^2 + F2^2 = Z conj(Zm),  |F1|^2 + |F2|^2 = (|Z|^2 + |Zm|^2)/2.
 * Spectra of real maps are Hermitian, so only columns 0 to Pw/2 are kept. All sums are doubles.
 * Work per call O(P log P) for P = Ph*Pw padded values; memory 48 P bytes.
 */
export class FrameSpectra {
  readonly width: number;
  readonly height: number;
  readonly #padWidth: number;
  readonly #padHeight: number;
  readonly #rowFft: FFT;
  readonly #columnFft: FFT;
  readonly #rowsIn: Float64Array;
  readonly #rowsOut: Float64Array[];
  /** Columns of the padded field, complex, one array per x; before and after the transform along y. */
  readonly #field: Float64Array[];
  readonly #spectrum: Float64Array[];
  readonly #plus: Float64Array[];
  readonly #minus: Float64Array[];

  constructor(width: number, height: number) {
    this.width = width;
    this.height = height;
    this.#padWidth = paddedLength(width);
    this.#padHeight = paddedLength(height);
    this.#rowFft = new FFT(this.#padWidth);
    this.#columnFft = new FFT(this.#padHeight);
    this.#rowsIn = new Float64Array(2 * this.#padWidth);
    this.#rowsOut = createColumns(STRIP, 2 * this.#padWidth);
    this.#field = createColumns(this.#padWidth, 2 * this.#padHeight);
    this.#spectrum = createColumns(this.#padWidth, 2 * this.#padHeight);
    this.#plus = createColumns(this.#padWidth / 2 + 1, 2 * this.#padHeight);
    this.#minus = createColumns(this.#padWidth / 2 + 1, this.#padHeight);
  }

  /** Adds the maps of x1 with itself and of x2 with itself; `second` null when there is one image. */
  addSquares(first: Float64Array, second: Float64Array | null): void {
    this.#transform(first, second);
    for (let kx = 0; kx <= this.#padWidth / 2; kx++) {
      const mirror = (this.#padWidth - kx) & (this.#padWidth - 1);
      addSquareColumn(this.#spectrum[kx]!, this.#spectrum[mirror]!, this.#plus[kx]!, this.#minus[kx]!);
    }
  }

  /** Adds the maps of x with y, symmetrised. */
  addProduct(x: Float64Array, y: Float64Array): void {
    this.#transform(x, y);
    for (let kx = 0; kx <= this.#padWidth / 2; kx++) {
      const mirror = (this.#padWidth - kx) & (this.#padWidth - 1);
      addProductColumn(this.#spectrum[kx]!, this.#spectrum[mirror]!, this.#plus[kx]!, this.#minus[kx]!);
    }
  }

  /** Adds `scale` times the summed maps to the caller's arrays and starts again from zero. */
  moveTo(plus: Float64Array, minus: Float64Array, scale: number): void {
    this.#joinSpectra();
    this.#invert();
    const { width, height } = this;
    const wide = 2 * width - 1;
    const high = 2 * height - 1;
    for (let y = 0; y < high; y++) {
      for (let x = 0; x < wide; x++) {
        plus[y * wide + x]! += scale * this.#field[x]![2 * y]!;
        // Mean of d and -d: equal but for rounding, and the map is to be symmetric to the last bit.
        const there = this.#lag(x - width + 1, y - height + 1);
        const back = this.#lag(width - 1 - x, height - 1 - y);
        minus[y * wide + x]! += scale * 0.5 * (there + back);
      }
    }
    for (const column of [...this.#plus, ...this.#minus]) column.fill(0);
  }

  #lag(dx: number, dy: number): number {
    return this.#field[dx & (this.#padWidth - 1)]![2 * (dy & (this.#padHeight - 1)) + 1]!;
  }

  /** Spectrum of first + i second. Rows below the image are zero and are skipped in the first pass. */
  #transform(first: Float64Array, second: Float64Array | null): void {
    const { width, height } = this;
    for (let top = 0; top < height; top += STRIP) {
      const rows = Math.min(STRIP, height - top);
      for (let r = 0; r < rows; r++) {
        const row = this.#rowsIn;
        const from = (top + r) * width;
        for (let x = 0; x < width; x++) {
          row[2 * x] = first[from + x]!;
          row[2 * x + 1] = second === null ? 0 : second[from + x]!;
        }
        this.#rowFft.transform(this.#rowsOut[r]!, row);
      }
      for (let x = 0; x < this.#padWidth; x++) {
        const column = this.#field[x]!;
        for (let r = 0; r < rows; r++) {
          const row = this.#rowsOut[r]!;
          column[2 * (top + r)] = row[2 * x]!;
          column[2 * (top + r) + 1] = row[2 * x + 1]!;
        }
      }
    }
    for (let x = 0; x < this.#padWidth; x++) {
      const column = this.#field[x]!;
      column.fill(0, 2 * height);
      this.#columnFft.transform(this.#spectrum[x]!, column);
    }
  }

  /** plus + i minus as one full spectrum: both maps are real, so one inverse transform gives both. */
  #joinSpectra(): void {
    const columns = this.#padWidth;
    const rows = this.#padHeight;
    for (let kx = 0; kx < columns; kx++) {
      const mirrored = kx > columns / 2;
      const plus = this.#plus[mirrored ? columns - kx : kx]!;
      const minus = this.#minus[mirrored ? columns - kx : kx]!;
      const out = this.#spectrum[kx]!;
      for (let ky = 0; ky < rows; ky++) {
        const at = mirrored ? (rows - ky) & (rows - 1) : ky;
        const sign = mirrored ? -1 : 1;
        out[2 * ky] = plus[2 * at]!;
        out[2 * ky + 1] = sign * plus[2 * at + 1]! + minus[at]!;
      }
    }
  }

  #invert(): void {
    for (let x = 0; x < this.#padWidth; x++)
      this.#columnFft.inverseTransform(this.#field[x]!, this.#spectrum[x]!);
    const row = this.#rowsOut[0]!;
    const from = new Float64Array(2 * this.#padWidth);
    for (let y = 0; y < this.#padHeight; y++) {
      for (let x = 0; x < this.#padWidth; x++) {
        from[2 * x] = this.#field[x]![2 * y]!;
        from[2 * x + 1] = this.#field[x]![2 * y + 1]!;
      }
      this.#rowFft.inverseTransform(row, from);
      for (let x = 0; x < this.#padWidth; x++) {
        this.#field[x]![2 * y] = row[2 * x]!;
        this.#field[x]![2 * y + 1] = row[2 * x + 1]!;
      }
    }
  }
}

function createColumns(count: number, length: number): Float64Array[] {
  return Array.from({ length: count }, () => new Float64Array(length));
}

/** One column of Z and its mirror: plus += Z conj(Zm), minus += (|Z|^2 + |Zm|^2)/2. */
function addSquareColumn(z: Float64Array, zm: Float64Array, plus: Float64Array, minus: Float64Array): void {
  const rows = minus.length;
  for (let ky = 0; ky < rows; ky++) {
    const my = (rows - ky) & (rows - 1);
    const re = z[2 * ky]!;
    const im = z[2 * ky + 1]!;
    const mirrorRe = zm[2 * my]!;
    const mirrorIm = zm[2 * my + 1]!;
    plus[2 * ky]! += re * mirrorRe + im * mirrorIm;
    plus[2 * ky + 1]! += im * mirrorRe - re * mirrorIm;
    minus[ky]! += 0.5 * (re * re + im * im + mirrorRe * mirrorRe + mirrorIm * mirrorIm);
  }
}

/** Fx = (Z + conj(Zm))/2, Fy = (Z - conj(Zm))/2i: plus += Fx Fy, minus += Re(conj(Fx) Fy). */
function addProductColumn(z: Float64Array, zm: Float64Array, plus: Float64Array, minus: Float64Array): void {
  const rows = minus.length;
  for (let ky = 0; ky < rows; ky++) {
    const my = (rows - ky) & (rows - 1);
    const xRe = 0.5 * (z[2 * ky]! + zm[2 * my]!);
    const xIm = 0.5 * (z[2 * ky + 1]! - zm[2 * my + 1]!);
    const yRe = 0.5 * (z[2 * ky + 1]! + zm[2 * my + 1]!);
    const yIm = 0.5 * (zm[2 * my]! - z[2 * ky]!);
    plus[2 * ky]! += xRe * yRe - xIm * yIm;
    plus[2 * ky + 1]! += xRe * yIm + xIm * yRe;
    minus[ky]! += xRe * yRe + xIm * yIm;
  }
}
