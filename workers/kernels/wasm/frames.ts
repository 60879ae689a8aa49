// Sum- and difference-coordinate maps of frames, compiled. The readable twin is `FrameSpectra` (../frame-spectra.ts);
// ../frame-maps-wasm.ts places the arrays and says what lies where. Arguments are byte addresses in the caller's memory.
//
// Frames lie padded in slots: `columns` values a row (a multiple of 4), padHeight/2 rows, zero outside the image, f32
// where that is exact and f64 otherwise. Two differences share one transform along y, are told apart by the symmetry of
// real columns, transposed four by four, and go along x one by one; their squares are added up in f32, position by
// position, and brought to f64 by `flushSquares`.

import {
  fullStages,
  lastStage,
  lastStageSquares,
  middleStages,
  openButterfly,
} from './frames-fft';

export { addJoint, addJointPairs, packDifferences } from './frames-joint';
export { addListSums, addOwnPairs, flushPairs, listLit, takeCrossPairs } from './frames-pairs';
export { addOuters, addSums, prepareFrame, scaleFrame } from './frames-pixels';
export { resampleMaps } from './frames-resample';

const CELL: usize = 32;

/** Four values of p - q as f32, the difference taken in the precision of the slot. */
@inline
function difference<S>(p: usize, q: usize): v128 {
  if (sizeof<S>() == 4) return f32x4.sub(v128.load(p), v128.load(q));
  const low = f32x4.demote_f64x2_zero(f64x2.sub(v128.load(p), v128.load(q)));
  const high = f32x4.demote_f64x2_zero(f64x2.sub(v128.load(p, 16), v128.load(q, 16)));
  return v128.shuffle<f32>(low, high, 0, 1, 4, 5);
}

@inline
function transposeInto(to: usize, a: v128, b: v128, c: v128, d: v128): void {
  const ab = v128.shuffle<f32>(a, b, 0, 4, 1, 5);
  const cd = v128.shuffle<f32>(c, d, 0, 4, 1, 5);
  const abHigh = v128.shuffle<f32>(a, b, 2, 6, 3, 7);
  const cdHigh = v128.shuffle<f32>(c, d, 2, 6, 3, 7);
  v128.store(to, v128.shuffle<f32>(ab, cd, 0, 1, 4, 5));
  v128.store(to, v128.shuffle<f32>(ab, cd, 2, 3, 6, 7), 32);
  v128.store(to, v128.shuffle<f32>(abHigh, cdHigh, 0, 1, 4, 5), 64);
  v128.store(to, v128.shuffle<f32>(abHigh, cdHigh, 2, 3, 6, 7), 96);
}

/** Twice the spectra along y of first - second and second - third, to `to` and `to + frameBytes`. */
function transformColumns<S>(
  first: usize, second: usize, third: usize, columns: i32, padHeight: i32, twiddles: usize, positions: usize,
  work: usize, to: usize, stripBytes: usize, frameBytes: usize,
): void {
  const row = <usize>columns * sizeof<S>();
  const quarterRows = padHeight >> 2;
  const below = <usize>quarterRows * row;
  const quarter = <usize>quarterRows * CELL;
  const strips = (padHeight >> 3) + 1;
  const nyquist = padHeight >> 1;
  for (let x = 0; x < columns; x += 4) {
    let at = <usize>x * sizeof<S>();
    let w = twiddles;
    let cell = work;
    for (let j = 0; j < quarterRows; j++) {
      openButterfly<f32>(
        cell, quarter, w,
        difference<S>(first + at, second + at), difference<S>(second + at, third + at),
        difference<S>(first + at + below, second + at + below),
        difference<S>(second + at + below, third + at + below),
      );
      at += row;
      w += 24;
      cell += CELL;
    }
    middleStages<f32>(work, padHeight, twiddles);
    lastStage<f32>(work, padHeight);
    let out = to + <usize>x * CELL;
    for (let s = 0; s < strips; s++) {
      let r0 = i32x4.splat(0);
      let r1 = r0;
      let r2 = r0;
      let i0 = r0;
      let i1 = r0;
      let i2 = r0;
      let m0 = r0;
      let m1 = r0;
      let m2 = r0;
      let n0 = r0;
      let n1 = r0;
      let n2 = r0;
      for (let lane = 0; lane < 4; lane++) {
        // Past the middle the last strip repeats it; those lanes are never read.
        const ky = min(4 * s + lane, nyquist);
        const there = work + load<u32>(positions + (<usize>ky << 2));
        const back = work + load<u32>(positions + (<usize>((padHeight - ky) & (padHeight - 1)) << 2));
        const zRe = v128.load(there);
        const zIm = v128.load(there, 16);
        const mRe = v128.load(back);
        const mIm = v128.load(back, 16);
        const firstRe = f32x4.add(zRe, mRe);
        const firstIm = f32x4.sub(zIm, mIm);
        const secondRe = f32x4.add(zIm, mIm);
        const secondIm = f32x4.sub(mRe, zRe);
        if (lane == 0) {
          r0 = firstRe;
          i0 = firstIm;
          m0 = secondRe;
          n0 = secondIm;
        } else if (lane == 1) {
          r1 = firstRe;
          i1 = firstIm;
          m1 = secondRe;
          n1 = secondIm;
        } else if (lane == 2) {
          r2 = firstRe;
          i2 = firstIm;
          m2 = secondRe;
          n2 = secondIm;
        } else {
          transposeInto(out, r0, r1, r2, firstRe);
          transposeInto(out + 16, i0, i1, i2, firstIm);
          transposeInto(out + frameBytes, m0, m1, m2, secondRe);
          transposeInto(out + frameBytes + 16, n0, n1, n2, secondIm);
        }
      }
      out += stripBytes;
    }
  }
}

export function transformColumnsF32(
  first: usize, second: usize, third: usize, columns: i32, padHeight: i32, twiddles: usize, positions: usize,
  work: usize, to: usize, stripBytes: usize, frameBytes: usize,
): void {
  transformColumns<f32>(
    first, second, third, columns, padHeight, twiddles, positions, work, to, stripBytes, frameBytes,
  );
}

export function transformColumnsF64(
  first: usize, second: usize, third: usize, columns: i32, padHeight: i32, twiddles: usize, positions: usize,
  work: usize, to: usize, stripBytes: usize, frameBytes: usize,
): void {
  transformColumns<f64>(
    first, second, third, columns, padHeight, twiddles, positions, work, to, stripBytes, frameBytes,
  );
}

/** Transforms `frames` half-transformed frames along x, a strip of four ky at a time, and adds up their squares. */
export function addSquares(
  from: usize, frames: i32, strips: i32, padWidth: i32, twiddles: usize, work: usize, sums: usize,
  stripBytes: usize, frameBytes: usize,
): void {
  const quarterColumns = padWidth >> 2;
  const quarter = <usize>quarterColumns * CELL;
  for (let s = 0; s < strips; s++) {
    const strip = from + <usize>s * stripBytes;
    const to = sums + <usize>s * <usize>padWidth * 48;
    for (let f = 0; f < frames; f++) {
      let p = strip + <usize>f * frameBytes;
      let w = twiddles;
      let cell = work;
      for (let j = 0; j < quarterColumns; j++) {
        openButterfly<f32>(
          cell, quarter, w, v128.load(p), v128.load(p, 16), v128.load(p + quarter), v128.load(p + quarter, 16),
        );
        p += CELL;
        w += 24;
        cell += CELL;
      }
      middleStages<f32>(work, padWidth, twiddles);
      lastStageSquares(work, padWidth, to);
    }
  }
}

/** One column of a strip along x, all stages. */
@inline
function transformRow(p: usize, padWidth: i32, twiddles: usize, work: usize): void {
  const quarter = <usize>(padWidth >> 2) * CELL;
  let w = twiddles;
  for (let cell = work; cell < work + quarter; cell += CELL) {
    openButterfly<f32>(
      cell, quarter, w, v128.load(p), v128.load(p, 16), v128.load(p + quarter), v128.load(p + quarter, 16),
    );
    p += CELL;
    w += 24;
  }
  middleStages<f32>(work, padWidth, twiddles);
  lastStage<f32>(work, padWidth);
}

/** As `addSquares`, for the symmetrised product of two half-transformed frames; `other` is a second column of room. */
export function addProduct(
  from: usize, strips: i32, padWidth: i32, twiddles: usize, work: usize, other: usize, sums: usize,
  stripBytes: usize, frameBytes: usize,
): void {
  const half = f32x4.splat(0.5);
  let to = sums;
  for (let s = 0; s < strips; s++) {
    const strip = from + <usize>s * stripBytes;
    transformRow(strip, padWidth, twiddles, work);
    transformRow(strip + frameBytes, padWidth, twiddles, other);
    for (let at: usize = 0; at < <usize>padWidth * CELL; at += CELL) {
      const aRe = v128.load(work + at);
      const aIm = v128.load(work + at, 16);
      const bRe = v128.load(other + at);
      const bIm = v128.load(other + at, 16);
      const re = f32x4.mul(aRe, bRe);
      const im = f32x4.mul(aIm, bIm);
      const crossed = f32x4.add(f32x4.mul(aRe, bIm), f32x4.mul(aIm, bRe));
      v128.store(to, f32x4.add(v128.load(to), f32x4.sub(re, im)));
      v128.store(to, f32x4.add(v128.load(to, 16), f32x4.mul(half, crossed)), 16);
      v128.store(to, f32x4.add(v128.load(to, 32), f32x4.add(re, im)), 32);
      to += 48;
    }
  }
}

/** totals (f64) += sums (f32), and the sums start again from zero; `n` values, a multiple of 4. */
export function flushSquares(sums: usize, totals: usize, n: i32): void {
  const zero = i32x4.splat(0);
  for (let i = 0; i < n; i += 4) {
    const value = v128.load(sums);
    v128.store(totals, f64x2.add(v128.load(totals), f64x2.promote_low_f32x4(value)));
    const high = f64x2.promote_low_f32x4(v128.shuffle<f32>(value, value, 2, 3, 2, 3));
    v128.store(totals, f64x2.add(v128.load(totals, 16), high), 16);
    v128.store(sums, zero);
    sums += 16;
    totals += 32;
  }
}

/**
 * Both maps from their summed squares, by one inverse transform in f64: rows ky of S + i Q and S - i Q along x, S the
 * spectrum of the sum map and Q that of the difference map, then columns along y, two at a time. Adds to
 * plus[(2H-1)(2W-1)] and minus (lag (0, 0) in the middle, mean of d and -d), both times `scale`.
 */
export function invertSquares(
  totals: usize, width: i32, height: i32, padWidth: i32, padHeight: i32, twiddlesX: usize, twiddlesY: usize,
  positionsX: usize, positionsY: usize, work: usize, field: usize, plus: usize, minus: usize, scale: f64,
): void {
  const columnBytes = <usize>padHeight * CELL;
  for (let ky = 0; ky <= padHeight >> 1; ky += 2) {
    const from = totals + <usize>(ky >> 2) * <usize>padWidth * 96 + (<usize>(ky & 2) << 3);
    for (let turn = 0; turn < 2; turn++) {
      for (let kx = 0; kx < padWidth; kx++) {
        const p = from + <usize>(load<u32>(positionsX + (<usize>kx << 2)) / 32) * 96;
        const sRe = v128.load(p);
        const x = v128.load(p, 32);
        const sIm = f64x2.add(x, x);
        const q = v128.load(p, 64);
        const cell = work + <usize>kx * CELL;
        v128.store(cell, turn == 0 ? f64x2.add(sIm, q) : f64x2.sub(sIm, q));
        v128.store(cell, sRe, 16);
      }
      fullStages<f64>(work, padWidth, twiddlesX);
      lastStage<f64>(work, padWidth);
      const back = (padHeight - ky) & (padHeight - 1);
      const backNext = (padHeight - ky - 1) & (padHeight - 1);
      for (let x = 0; x < padWidth; x++) {
        const cell = work + load<u32>(positionsX + (<usize>x << 2));
        const column = field + <usize>(x >> 1) * columnBytes + (<usize>(x & 1) << 3);
        const lowAt = column + <usize>(turn == 0 ? ky : back) * CELL;
        const highAt = column + <usize>(turn == 0 ? ky + 1 : backNext) * CELL;
        // Stored exchanged, as the second transform wants it: {Im, Re}. The rows of -ky are conjugates.
        const im = load<f64>(cell);
        const imHigh = load<f64>(cell, 8);
        const re = load<f64>(cell, 16);
        const reHigh = load<f64>(cell, 24);
        // Row 0 and the middle row are their own mirror images, and past the middle nothing is read.
        if (turn == 0 || (ky != 0 && ky != padHeight >> 1)) {
          store<f64>(lowAt, turn == 0 ? im : -im);
          store<f64>(lowAt, re, 16);
        }
        if (ky + 1 < padHeight >> 1) {
          store<f64>(highAt, turn == 0 ? imHigh : -imHigh);
          store<f64>(highAt, reHigh, 16);
        }
      }
    }
  }
  const wide = 2 * width - 1;
  const high = 2 * height - 1;
  for (let x = 0; x < padWidth; x += 2) {
    const column = field + <usize>(x >> 1) * columnBytes;
    fullStages<f64>(column, padHeight, twiddlesY);
    lastStage<f64>(column, padHeight);
  }
  for (let y = 0; y < high; y++) {
    const dy = y - height + 1;
    const rowPlus = load<u32>(positionsY + (<usize>y << 2));
    const rowThere = load<u32>(positionsY + (<usize>(dy & (padHeight - 1)) << 2));
    const rowBack = load<u32>(positionsY + (<usize>(-dy & (padHeight - 1)) << 2));
    let to = <usize>(y * wide) << 3;
    for (let x = 0; x < wide; x++) {
      const dx = x - width + 1;
      const there = dx & (padWidth - 1);
      const back = -dx & (padWidth - 1);
      const value = load<f64>(field + <usize>(x >> 1) * columnBytes + (<usize>(x & 1) << 3) + rowPlus, 16);
      const one = load<f64>(field + <usize>(there >> 1) * columnBytes + (<usize>(there & 1) << 3) + rowThere);
      const other = load<f64>(field + <usize>(back >> 1) * columnBytes + (<usize>(back & 1) << 3) + rowBack);
      store<f64>(plus + to, load<f64>(plus + to) + scale * value);
      // Equal but for rounding, and the map is to be symmetric to the last bit.
      store<f64>(minus + to, load<f64>(minus + to) + scale * 0.5 * (one + other));
      to += 8;
    }
  }
}
