// Power-of-two transforms of several columns at once, one column a SIMD lane: T = f32 has four, T = f64 two.
//
// Decimation in frequency, radix 4 (Cooley and Tukey; the butterflies are derived here). A column of n complex values is
// n times {re v128, im v128}, 32 bytes a value, so 512 values of four columns are 16 KB and stay in the first cache.
// Output is digit-reversed; whoever needs its order reads it through the table of positions. The last stage (4 or 8
// values, no twiddles in memory) is the caller's, who may use the values while they are in registers.
// The inverse is the forward transform with real and imaginary parts exchanged on both sides.

const STEP: usize = 32;

@inline
export function splat<T>(at: usize): v128 {
  return sizeof<T>() == 4 ? v128.load32_splat(at) : v128.load64_splat(at);
}

@inline
function put(at: usize, re: v128, im: v128): void {
  v128.store(at, re);
  v128.store(at, im, 16);
}

/** Stores (re + i im) times the twiddle at `w`. */
@inline
function putTurned<T>(at: usize, re: v128, im: v128, w: usize): void {
  const c = splat<T>(w);
  const s = splat<T>(w + sizeof<T>());
  v128.store(at, v128.sub<T>(v128.mul<T>(re, c), v128.mul<T>(im, s)));
  v128.store(at, v128.add<T>(v128.mul<T>(re, s), v128.mul<T>(im, c)), 16);
}

/** One butterfly of the first stage with the upper half of the column zero: a = x(j), b = x(j + n/4). */
@inline
export function openButterfly<T>(
  to: usize, quarter: usize, w: usize, aRe: v128, aIm: v128, bRe: v128, bIm: v128,
): void {
  put(to, v128.add<T>(aRe, bRe), v128.add<T>(aIm, bIm));
  putTurned<T>(to + quarter, v128.add<T>(aRe, bIm), v128.sub<T>(aIm, bRe), w);
  putTurned<T>(to + 2 * quarter, v128.sub<T>(aRe, bRe), v128.sub<T>(aIm, bIm), w + 2 * sizeof<T>());
  putTurned<T>(to + 3 * quarter, v128.sub<T>(aRe, bIm), v128.add<T>(aIm, bRe), w + 4 * sizeof<T>());
}

/** One radix-4 stage in place: sub-transforms of `length` values; `w` holds length/4 triples of twiddles. */
function stage<T>(from: usize, n: i32, length: i32, w: usize): void {
  const quarter = <usize>(length >> 2) * STEP;
  const end = from + <usize>n * STEP;
  for (let base = from; base < end; base += 4 * quarter) {
    let turn = w;
    const stop = base + quarter;
    for (let p = base; p < stop; p += STEP) {
      const p1 = p + quarter;
      const p2 = p1 + quarter;
      const p3 = p2 + quarter;
      const aRe = v128.load(p);
      const cRe = v128.load(p2);
      const sumRe = v128.add<T>(aRe, cRe);
      const lessRe = v128.sub<T>(aRe, cRe);
      const aIm = v128.load(p, 16);
      const cIm = v128.load(p2, 16);
      const sumIm = v128.add<T>(aIm, cIm);
      const lessIm = v128.sub<T>(aIm, cIm);
      const bRe = v128.load(p1);
      const dRe = v128.load(p3);
      const otherRe = v128.add<T>(bRe, dRe);
      const turnRe = v128.sub<T>(bRe, dRe);
      const bIm = v128.load(p1, 16);
      const dIm = v128.load(p3, 16);
      const otherIm = v128.add<T>(bIm, dIm);
      const turnIm = v128.sub<T>(bIm, dIm);
      put(p, v128.add<T>(sumRe, otherRe), v128.add<T>(sumIm, otherIm));
      putTurned<T>(p1, v128.add<T>(lessRe, turnIm), v128.sub<T>(lessIm, turnRe), turn);
      putTurned<T>(p2, v128.sub<T>(sumRe, otherRe), v128.sub<T>(sumIm, otherIm), turn + 2 * sizeof<T>());
      putTurned<T>(p3, v128.sub<T>(lessRe, turnIm), v128.add<T>(lessIm, turnRe), turn + 4 * sizeof<T>());
      turn += 6 * sizeof<T>();
    }
  }
}

/** The stages between the first one, whose sub-transforms have n/4 values, and the last one. */
export function middleStages<T>(from: usize, n: i32, twiddles: usize): void {
  let w = twiddles + <usize>(n >> 2) * 6 * sizeof<T>();
  for (let length = n >> 2; length > 8; length >>= 2) {
    stage<T>(from, n, length, w);
    w += <usize>(length >> 2) * 6 * sizeof<T>();
  }
}

/** All stages but the last, from a full column. n >= 16. */
export function fullStages<T>(from: usize, n: i32, twiddles: usize): void {
  stage<T>(from, n, n, twiddles);
  middleStages<T>(from, n, twiddles);
}

/** Whether the last stage has 8 values (n is an odd power of two) or 4. */
@inline
export function endsInEight(n: i32): bool {
  return (ctz(n) & 1) == 1;
}


@inline
function half<T>(): v128 {
  return sizeof<T>() == 4 ? f32x4.splat(<f32>0.7071067811865476) : f64x2.splat(0.7071067811865476);
}

/** What is done with value number `index` of a group of 4 or 8: `add` squares it onto sums, otherwise it is stored. */
@inline
function emit<T>(squares: bool, at: usize, index: usize, re: v128, im: v128): void {
  if (squares) {
    const to = at + index * 48;
    const rr = v128.mul<T>(re, re);
    const ii = v128.mul<T>(im, im);
    v128.store(to, v128.add<T>(v128.load(to), v128.sub<T>(rr, ii)));
    v128.store(to, v128.add<T>(v128.load(to, 16), v128.mul<T>(re, im)), 16);
    v128.store(to, v128.add<T>(v128.load(to, 32), v128.add<T>(rr, ii)), 32);
  } else {
    put(at + index * STEP, re, im);
  }
}

@inline
function lastFour<T>(squares: bool, p: usize, to: usize): void {
  const aRe = v128.load(p);
  const aIm = v128.load(p, 16);
  const bRe = v128.load(p, 32);
  const bIm = v128.load(p, 48);
  const cRe = v128.load(p, 64);
  const cIm = v128.load(p, 80);
  const dRe = v128.load(p, 96);
  const dIm = v128.load(p, 112);
  const sumRe = v128.add<T>(aRe, cRe);
  const lessRe = v128.sub<T>(aRe, cRe);
  const sumIm = v128.add<T>(aIm, cIm);
  const lessIm = v128.sub<T>(aIm, cIm);
  const otherRe = v128.add<T>(bRe, dRe);
  const turnRe = v128.sub<T>(bRe, dRe);
  const otherIm = v128.add<T>(bIm, dIm);
  const turnIm = v128.sub<T>(bIm, dIm);
  emit<T>(squares, to, 0, v128.add<T>(sumRe, otherRe), v128.add<T>(sumIm, otherIm));
  emit<T>(squares, to, 1, v128.add<T>(lessRe, turnIm), v128.sub<T>(lessIm, turnRe));
  emit<T>(squares, to, 2, v128.sub<T>(sumRe, otherRe), v128.sub<T>(sumIm, otherIm));
  emit<T>(squares, to, 3, v128.sub<T>(lessRe, turnIm), v128.add<T>(lessIm, turnRe));
}

/** Radix 4 over values j, j+2, j+4, j+6, then radix 2: value k0 + 4 k1 comes at 2 k0 + k1. */
@inline
function lastEight<T>(squares: bool, p: usize, to: usize): void {
  let aRe = v128.load(p);
  let cRe = v128.load(p, 128);
  let sumRe = v128.add<T>(aRe, cRe);
  let lessRe = v128.sub<T>(aRe, cRe);
  let aIm = v128.load(p, 16);
  let cIm = v128.load(p, 144);
  let sumIm = v128.add<T>(aIm, cIm);
  let lessIm = v128.sub<T>(aIm, cIm);
  let bRe = v128.load(p, 64);
  let dRe = v128.load(p, 192);
  let otherRe = v128.add<T>(bRe, dRe);
  let turnRe = v128.sub<T>(bRe, dRe);
  let bIm = v128.load(p, 80);
  let dIm = v128.load(p, 208);
  let otherIm = v128.add<T>(bIm, dIm);
  let turnIm = v128.sub<T>(bIm, dIm);
  const e0Re = v128.add<T>(sumRe, otherRe);
  const e0Im = v128.add<T>(sumIm, otherIm);
  const e1Re = v128.add<T>(lessRe, turnIm);
  const e1Im = v128.sub<T>(lessIm, turnRe);
  const e2Re = v128.sub<T>(sumRe, otherRe);
  const e2Im = v128.sub<T>(sumIm, otherIm);
  const e3Re = v128.sub<T>(lessRe, turnIm);
  const e3Im = v128.add<T>(lessIm, turnRe);
  aRe = v128.load(p, 32);
  cRe = v128.load(p, 160);
  sumRe = v128.add<T>(aRe, cRe);
  lessRe = v128.sub<T>(aRe, cRe);
  aIm = v128.load(p, 48);
  cIm = v128.load(p, 176);
  sumIm = v128.add<T>(aIm, cIm);
  lessIm = v128.sub<T>(aIm, cIm);
  bRe = v128.load(p, 96);
  dRe = v128.load(p, 224);
  otherRe = v128.add<T>(bRe, dRe);
  turnRe = v128.sub<T>(bRe, dRe);
  bIm = v128.load(p, 112);
  dIm = v128.load(p, 240);
  otherIm = v128.add<T>(bIm, dIm);
  turnIm = v128.sub<T>(bIm, dIm);
  let re = v128.add<T>(sumRe, otherRe);
  let im = v128.add<T>(sumIm, otherIm);
  emit<T>(squares, to, 0, v128.add<T>(e0Re, re), v128.add<T>(e0Im, im));
  emit<T>(squares, to, 1, v128.sub<T>(e0Re, re), v128.sub<T>(e0Im, im));
  // times -i
  re = v128.sub<T>(sumIm, otherIm);
  im = v128.sub<T>(otherRe, sumRe);
  emit<T>(squares, to, 4, v128.add<T>(e2Re, re), v128.add<T>(e2Im, im));
  emit<T>(squares, to, 5, v128.sub<T>(e2Re, re), v128.sub<T>(e2Im, im));
  const h = half<T>();
  // times (1 - i)/sqrt 2
  aRe = v128.add<T>(lessRe, turnIm);
  aIm = v128.sub<T>(lessIm, turnRe);
  re = v128.mul<T>(h, v128.add<T>(aRe, aIm));
  im = v128.mul<T>(h, v128.sub<T>(aIm, aRe));
  emit<T>(squares, to, 2, v128.add<T>(e1Re, re), v128.add<T>(e1Im, im));
  emit<T>(squares, to, 3, v128.sub<T>(e1Re, re), v128.sub<T>(e1Im, im));
  // times (-1 - i)/sqrt 2
  aRe = v128.sub<T>(lessRe, turnIm);
  aIm = v128.add<T>(lessIm, turnRe);
  re = v128.mul<T>(h, v128.sub<T>(aIm, aRe));
  im = v128.neg<T>(v128.mul<T>(h, v128.add<T>(aRe, aIm)));
  emit<T>(squares, to, 6, v128.add<T>(e3Re, re), v128.add<T>(e3Im, im));
  emit<T>(squares, to, 7, v128.sub<T>(e3Re, re), v128.sub<T>(e3Im, im));
}

/** Last stage in place: the column in digit-reversed order. */
export function lastStage<T>(from: usize, n: i32): void {
  const end = from + <usize>n * STEP;
  if (endsInEight(n)) for (let p = from; p < end; p += 8 * STEP) lastEight<T>(false, p, p);
  else for (let p = from; p < end; p += 4 * STEP) lastFour<T>(false, p, p);
}

/** Last stage of four columns, and of every value F: sums {Re^2 - Im^2, Re Im, Re^2 + Im^2} += at its position. */
export function lastStageSquares(from: usize, n: i32, sums: usize): void {
  const end = from + <usize>n * STEP;
  let to = sums;
  if (endsInEight(n)) {
    for (let p = from; p < end; p += 8 * STEP) {
      lastEight<f32>(true, p, to);
      to += 8 * 48;
    }
  } else {
    for (let p = from; p < end; p += 4 * STEP) {
      lastFour<f32>(true, p, to);
      to += 4 * 48;
    }
  }
}
