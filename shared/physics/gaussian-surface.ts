import type { LeastSquares } from './least-squares';

/**
 * Two Gaussian surfaces over the cells of a map as least-squares problems. Cell (x, y) counts at its centre; `load` takes
 * a map in row-major order. Cells in `leftOut` do not count.
 *
 * Parameters: amplitude, centre x, centre y, sigma x, sigma y, offset, and for the tilted one the correlation rho;
 * sigmas are the marginal ones. Offsets are kept against the mean of the data, so that a high pedestal costs no digits.
 */
abstract class Surface implements LeastSquares {
  abstract readonly parameters: number;
  readonly width: number;
  readonly height: number;
  readonly leftOut: Int32Array;
  /** Data about their mean, zero where left out. */
  protected readonly data: Float64Array;
  readonly cells: number;
  mean = 0;
  scale = 0;

  constructor(width: number, height: number, leftOut: Int32Array) {
    this.width = width;
    this.height = height;
    this.leftOut = leftOut;
    this.data = new Float64Array(width * height);
    this.cells = width * height - leftOut.length;
  }

  get freedom(): number {
    return this.cells - this.parameters;
  }

  load(map: Float64Array | Float32Array, from = 0): void {
    const { data, leftOut } = this;
    data.set(map.subarray(from, from + data.length));
    // What is left out may hold anything, no number too.
    for (const cell of leftOut) data[cell] = 0;
    const mean = sumOf(data) / this.cells;
    for (let i = 0; i < data.length; i++) data[i]! -= mean;
    for (const cell of leftOut) data[cell] = 0;
    this.mean = mean;
    this.scale = sumOfSquares(data);
  }

  allows(at: Float64Array): boolean {
    const reach = 1e3 * Math.max(this.width, this.height);
    return at[3]! > 0 && at[4]! > 0 && at[3]! < reach && at[4]! < reach;
  }

  abstract accumulate(at: Float64Array, h: Float64Array, g: Float64Array): number;
}

/**
 * m = A f(x) g(y) + c, f and g normal curves of height 1. Every column of J is a product of a function of x and one of y,
 * so J^T J follows from sums along x and along y, and J^T data from three sums along each row: 3 products a cell, against
 * 27 of the plain normal equations. S = data^2 - 2 data m + m^2 in the same terms, exact to rounding of data^2.
 * Derived here.
 */
export class UprightGaussian extends Surface {
  readonly parameters = 6;
  readonly #alongX: Curve;
  readonly #alongY: Curve;
  readonly #sumsX = new Float64Array(9);
  readonly #sumsY = new Float64Array(9);
  /** data against f g, f' g, f" g, f g', f g" (' by centre, " by sigma). */
  readonly #moments = new Float64Array(5);
  readonly #row = new Float64Array(6);

  constructor(width: number, height: number, leftOut: Int32Array = new Int32Array(0)) {
    super(width, height, leftOut);
    this.#alongX = createCurve(width);
    this.#alongY = createCurve(height);
  }

  accumulate(at: Float64Array, h: Float64Array, g: Float64Array): number {
    const height = at[0]!;
    const offset = at[5]!;
    fillCurve(this.#alongX, at[1]!, at[3]!, this.#sumsX);
    fillCurve(this.#alongY, at[2]!, at[4]!, this.#sumsY);
    this.#fillMoments();
    this.#fillNormal(height, h);
    const m = this.#moments;
    g[0] = m[0]!;
    g[1] = height * m[1]!;
    g[2] = height * m[3]!;
    g[3] = height * m[2]!;
    g[4] = height * m[4]!;
    // Data about their mean add up to nothing.
    g[5] = 0;
    let squares = this.scale - 2 * height * m[0]!;
    squares += height * (height * h[0]! + 2 * offset * h[5]!) + offset * offset * h[35]!;
    // The model is A times column A plus c times column c.
    for (let i = 0; i < 6; i++) g[i]! -= height * h[6 * i]! + offset * h[6 * i + 5]!;
    return Math.max(squares, 0);
  }

  #fillMoments(): void {
    const { width, height, data } = this;
    const [f, fCentre, fSigma] = this.#alongX;
    const [g, gCentre, gSigma] = this.#alongY;
    const m = this.#moments;
    m.fill(0);
    // Two rows at a time: the curves are loaded once for both, and six sums hide each other's latency.
    for (let y = 0; y < height; y += 2) {
      const one = y * width;
      const isPair = y + 1 < height;
      const two = isPair ? one + width : one;
      let s0 = 0;
      let s1 = 0;
      let s2 = 0;
      let t0 = 0;
      let t1 = 0;
      let t2 = 0;
      for (let x = 0; x < width; x++) {
        const d = data[one + x]!;
        const e = data[two + x]!;
        const f0 = f[x]!;
        const f1 = fCentre[x]!;
        const f2 = fSigma[x]!;
        s0 += d * f0;
        s1 += d * f1;
        s2 += d * f2;
        t0 += e * f0;
        t1 += e * f1;
        t2 += e * f2;
      }
      const gTwo = isPair ? g[y + 1]! : 0;
      m[0]! += s0 * g[y]! + t0 * gTwo;
      m[1]! += s1 * g[y]! + t1 * gTwo;
      m[2]! += s2 * g[y]! + t2 * gTwo;
      m[3]! += s0 * gCentre[y]! + (isPair ? t0 * gCentre[y + 1]! : 0);
      m[4]! += s0 * gSigma[y]! + (isPair ? t0 * gSigma[y + 1]! : 0);
    }
  }

  #fillNormal(height: number, h: Float64Array): void {
    const [x, y] = [this.#sumsX, this.#sumsY];
    const square = height * height;
    const set = (i: number, j: number, value: number): void => {
      h[6 * i + j] = value;
      h[6 * j + i] = value;
    };
    set(0, 0, x[0]! * y[0]!);
    set(0, 1, height * x[1]! * y[0]!);
    set(0, 2, height * x[0]! * y[1]!);
    set(0, 3, height * x[2]! * y[0]!);
    set(0, 4, height * x[0]! * y[2]!);
    set(0, 5, x[6]! * y[6]!);
    set(1, 1, square * x[3]! * y[0]!);
    set(1, 2, square * x[1]! * y[1]!);
    set(1, 3, square * x[4]! * y[0]!);
    set(1, 4, square * x[1]! * y[2]!);
    set(1, 5, height * x[7]! * y[6]!);
    set(2, 2, square * x[0]! * y[3]!);
    set(2, 3, square * x[2]! * y[1]!);
    set(2, 4, square * x[0]! * y[4]!);
    set(2, 5, height * x[6]! * y[7]!);
    set(3, 3, square * x[5]! * y[0]!);
    set(3, 4, square * x[2]! * y[2]!);
    set(3, 5, height * x[8]! * y[6]!);
    set(4, 4, square * x[0]! * y[5]!);
    set(4, 5, height * x[6]! * y[8]!);
    set(5, 5, this.width * this.height);
    for (const cell of this.leftOut) this.#takeOut(cell, height, h);
  }

  #takeOut(cell: number, height: number, h: Float64Array): void {
    const x = cell % this.width;
    const y = (cell - x) / this.width;
    const [f, fCentre, fSigma] = this.#alongX;
    const [g, gCentre, gSigma] = this.#alongY;
    const row = this.#row;
    row[0] = f[x]! * g[y]!;
    row[1] = height * fCentre[x]! * g[y]!;
    row[2] = height * f[x]! * gCentre[y]!;
    row[3] = height * fSigma[x]! * g[y]!;
    row[4] = height * f[x]! * gSigma[y]!;
    row[5] = 1;
    for (let i = 0; i < 6; i++) for (let j = 0; j < 6; j++) h[6 * i + j]! -= row[i]! * row[j]!;
  }
}

/**
 * m = A exp(-(u^2 - 2 rho u v + v^2) / (2 (1 - rho^2))) + c with u = (x - x0) / sigma x, v likewise: any ellipse, by its
 * marginal sigmas. Nothing separates, so every cell costs an exponential and 35 products.
 */
export class TiltedGaussian extends Surface {
  readonly parameters = 7;
  readonly #row = new Float64Array(7);
  readonly #isOut: Uint8Array;

  constructor(width: number, height: number, leftOut: Int32Array = new Int32Array(0)) {
    super(width, height, leftOut);
    this.#isOut = new Uint8Array(width * height);
    for (const cell of leftOut) this.#isOut[cell] = 1;
  }

  override allows(at: Float64Array): boolean {
    return super.allows(at) && Math.abs(at[6]!) < 0.9999;
  }

  accumulate(at: Float64Array, h: Float64Array, g: Float64Array): number {
    const [amplitude, x0, y0, sigmaX, sigmaY, offset, rho] = at as unknown as number[];
    const row = this.#row;
    const round = 1 / (1 - rho! * rho!);
    h.fill(0);
    g.fill(0);
    row[5] = 1;
    let squares = 0;
    for (let y = 0; y < this.height; y++) {
      const v = (y - y0!) / sigmaY!;
      for (let x = 0; x < this.width; x++) {
        const cell = y * this.width + x;
        if (this.#isOut[cell] === 1) continue;
        const u = (x - x0!) / sigmaX!;
        const q = (u * u - 2 * rho! * u * v + v * v) * round;
        const e = Math.exp(-0.5 * q);
        const byU = amplitude! * e * round * (u - rho! * v);
        const byV = amplitude! * e * round * (v - rho! * u);
        row[0] = e;
        row[1] = byU / sigmaX!;
        row[2] = byV / sigmaY!;
        row[3] = (byU * u) / sigmaX!;
        row[4] = (byV * v) / sigmaY!;
        row[6] = amplitude! * e * round * (u * v - rho! * q);
        const rest = this.data[cell]! - amplitude! * e - offset!;
        squares += rest * rest;
        for (let i = 0; i < 7; i++) {
          const ri = row[i]!;
          g[i]! += ri * rest;
          for (let j = 0; j <= i; j++) h[7 * i + j]! += ri * row[j]!;
        }
      }
    }
    for (let i = 0; i < 7; i++) for (let j = 0; j < i; j++) h[7 * j + i] = h[7 * i + j]!;
    return squares;
  }
}

/** Four sums at a time: each addition would wait for the one before. */
function sumOf(data: Float64Array): number {
  let [a, b, c, d] = [0, 0, 0, 0];
  const whole = data.length & ~3;
  for (let i = 0; i < whole; i += 4) {
    a += data[i]!;
    b += data[i + 1]!;
    c += data[i + 2]!;
    d += data[i + 3]!;
  }
  for (let i = whole; i < data.length; i++) a += data[i]!;
  return a + b + (c + d);
}

function sumOfSquares(data: Float64Array): number {
  let [a, b, c, d] = [0, 0, 0, 0];
  const whole = data.length & ~3;
  for (let i = 0; i < whole; i += 4) {
    a += data[i]! * data[i]!;
    b += data[i + 1]! * data[i + 1]!;
    c += data[i + 2]! * data[i + 2]!;
    d += data[i + 3]! * data[i + 3]!;
  }
  for (let i = whole; i < data.length; i++) a += data[i]! * data[i]!;
  return a + b + (c + d);
}

/** The normal curve over the cells with its derivatives by centre and by sigma. */
type Curve = [value: Float64Array, byCentre: Float64Array, bySigma: Float64Array];

function createCurve(cells: number): Curve {
  return [new Float64Array(cells), new Float64Array(cells), new Float64Array(cells)];
}

/** Also their sums: ff, ff', ff", f'f', f'f", f"f", f, f', f". */
function fillCurve(
  [value, byCentre, bySigma]: Curve,
  centre: number,
  sigma: number,
  sums: Float64Array,
): void {
  sums.fill(0);
  for (let i = 0; i < value.length; i++) {
    const u = (i - centre) / sigma;
    const f = Math.exp(-0.5 * u * u);
    const first = (f * u) / sigma;
    const second = first * u;
    value[i] = f;
    byCentre[i] = first;
    bySigma[i] = second;
    sums[0]! += f * f;
    sums[1]! += f * first;
    sums[2]! += f * second;
    sums[3]! += first * first;
    sums[4]! += first * second;
    sums[5]! += second * second;
    sums[6]! += f;
    sums[7]! += first;
    sums[8]! += second;
  }
}
