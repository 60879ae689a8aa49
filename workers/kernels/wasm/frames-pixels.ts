// Pixels to padded frames, and the sums that need no transform. Twins: ../frame-sums.ts.

/** Four pixels of an 8- or 16-bit type as i32. */
@inline
function loadWhole<P>(at: usize): v128 {
  if (sizeof<P>() == 1) {
    const bytes = v128.load32_zero(at);
    return isSigned<P>()
      ? i32x4.extend_low_i16x8_s(i16x8.extend_low_i8x16_s(bytes))
      : i32x4.extend_low_i16x8_u(i16x8.extend_low_i8x16_u(bytes));
  }
  return isSigned<P>() ? v128.load_ext<i16>(at) : v128.load_ext<u16>(at);
}

/** Four pixels of a narrow type as f32, exactly. */
@inline
function loadSingle<P>(at: usize): v128 {
  return isFloat<P>() ? v128.load(at) : f32x4.convert_i32x4_s(loadWhole<P>(at));
}

@inline
function upper(value: v128): v128 {
  return v128.shuffle<f32>(value, value, 2, 3, 2, 3);
}

/** Pixels 0, 1 (or 2, 3) of four as f64. */
@inline
function loadDouble<P>(at: usize, second: bool): v128 {
  if (isFloat<P>() && sizeof<P>() == 8) return v128.load(second ? at + 16 : at);
  if (sizeof<P>() == 4 && !isFloat<P>()) {
    const four = v128.load(at);
    const two = second ? upper(four) : four;
    return isSigned<P>() ? f64x2.convert_low_i32x4_s(two) : f64x2.convert_low_i32x4_u(two);
  }
  const four = loadSingle<P>(at);
  return f64x2.promote_low_f32x4(second ? upper(four) : four);
}

@inline
function horizontal(two: v128): f64 {
  return f64x2.extract_lane(two, 0) + f64x2.extract_lane(two, 1);
}

@inline
function addSquare(sum: v128, low: v128, high: v128): v128 {
  return f64x2.add(sum, f64x2.add(f64x2.mul(low, low), f64x2.mul(high, high)));
}

/**
 * One frame into a slot of type S: value - offset, 1 above `threshold` and 0 elsewhere where `counting`, 0 where the
 * mask is 0. Returns the total, and at `squares` the sum of squares before the threshold, where pixels are floating. May
 * read 3 pixels past the frame.
 */
@inline
function prepare<P, S>(
  from: usize, width: i32, height: i32, columns: i32, mask: usize, to: usize, offset: f64, counting: bool,
  threshold: f64, squares: usize,
): f64 {
  let total = f64x2.splat(0);
  let square = f64x2.splat(0);
  const offsets = sizeof<S>() == 4 ? f32x4.splat(<f32>offset) : f64x2.splat(offset);
  const thresholds = f64x2.splat(threshold);
  const ones = f64x2.splat(1);
  for (let y = 0; y < height; y++) {
    let p = from + <usize>(y * width) * sizeof<P>();
    for (let x = 0; x < columns; x += 4) {
      const open = v128.load(mask);
      let low: v128;
      let high: v128;
      if (sizeof<S>() == 4 && !counting) {
        const four = v128.and(f32x4.sub(loadSingle<P>(p), offsets), open);
        v128.store(to, four);
        low = f64x2.promote_low_f32x4(four);
        high = f64x2.promote_low_f32x4(upper(four));
        if (isFloat<P>()) square = addSquare(square, low, high);
      } else {
        low = loadDouble<P>(p, false);
        high = loadDouble<P>(p, true);
        const shift = f64x2.splat(offset);
        low = f64x2.sub(low, shift);
        high = f64x2.sub(high, shift);
        low = v128.and(low, i64x2.extend_low_i32x4_s(open));
        high = v128.and(high, i64x2.extend_high_i32x4_s(open));
        // Before the threshold, which would turn what is no number into a dark pixel.
        if (isFloat<P>()) square = addSquare(square, low, high);
        if (counting) {
          low = v128.and(f64x2.gt(low, thresholds), v128.and(ones, i64x2.extend_low_i32x4_s(open)));
          high = v128.and(f64x2.gt(high, thresholds), v128.and(ones, i64x2.extend_high_i32x4_s(open)));
        }
        if (sizeof<S>() == 4) {
          const four = v128.shuffle<f32>(
            f32x4.demote_f64x2_zero(low), f32x4.demote_f64x2_zero(high), 0, 1, 4, 5,
          );
          v128.store(to, four);
        } else {
          v128.store(to, low);
          v128.store(to, high, 16);
        }
      }
      total = f64x2.add(total, f64x2.add(low, high));
      p += 4 * sizeof<P>();
      to += 4 * sizeof<S>();
      mask += 16;
    }
  }
  store<f64>(squares, horizontal(square));
  return horizontal(total);
}

/**
 * As `prepare` without a threshold, for narrow whole numbers and f32 slots, whose offset is whole: totals are added in i32 a
 * row (up to 2^17 columns), and the offset is taken from them at the end.
 */
@inline
function prepareWhole<P>(
  from: usize, width: i32, height: i32, columns: i32, mask: usize, to: usize, offset: f64,
): f64 {
  const offsets = f32x4.splat(<f32>offset);
  let total = f64x2.splat(0);
  let opened = i32x4.splat(0);
  for (let y = 0; y < height; y++) {
    let p = from + <usize>(y * width) * sizeof<P>();
    let row = i32x4.splat(0);
    for (let x = 0; x < columns; x += 4) {
      const open = v128.load(mask);
      const four = v128.and(loadWhole<P>(p), open);
      v128.store(to, f32x4.sub(f32x4.convert_i32x4_s(four), v128.and(offsets, open)));
      row = i32x4.add(row, four);
      opened = i32x4.sub(opened, open);
      p += 4 * sizeof<P>();
      to += 16;
      mask += 16;
    }
    total = f64x2.add(
      total,
      f64x2.add(f64x2.convert_low_i32x4_s(row), f64x2.convert_low_i32x4_s(upper(row))),
    );
  }
  const open = f64x2.add(f64x2.convert_low_i32x4_s(opened), f64x2.convert_low_i32x4_s(upper(opened)));
  return horizontal(total) - offset * horizontal(open);
}

function prepareAs<P>(
  from: usize, width: i32, height: i32, columns: i32, mask: usize, to: usize, double: bool, offset: f64,
  counting: bool, threshold: f64, squares: usize,
): f64 {
  if (!isFloat<P>() && !double && !counting) {
    store<f64>(squares, 0);
    return prepareWhole<P>(from, width, height, columns, mask, to, offset);
  }
  if (double) return prepare<P, f64>(from, width, height, columns, mask, to, offset, counting, threshold, squares);
  return prepare<P, f32>(from, width, height, columns, mask, to, offset, counting, threshold, squares);
}

/** `type`: 0 u8, 1 i8, 2 u16, 3 i16, 4 f32, 5 u32, 6 i32, 7 f64; the last three need f64 slots. */
export function prepareFrame(
  type: i32, from: usize, width: i32, height: i32, columns: i32, mask: usize, to: usize, double: bool,
  offset: f64, counting: bool, threshold: f64, squares: usize,
): f64 {
  const n = columns;
  if (type == 0) return prepareAs<u8>(from, width, height, n, mask, to, double, offset, counting, threshold, squares);
  if (type == 1) return prepareAs<i8>(from, width, height, n, mask, to, double, offset, counting, threshold, squares);
  if (type == 2) return prepareAs<u16>(from, width, height, n, mask, to, double, offset, counting, threshold, squares);
  if (type == 3) return prepareAs<i16>(from, width, height, n, mask, to, double, offset, counting, threshold, squares);
  if (type == 4) return prepareAs<f32>(from, width, height, n, mask, to, double, offset, counting, threshold, squares);
  if (type == 5) return prepare<u32, f64>(from, width, height, n, mask, to, offset, counting, threshold, squares);
  if (type == 6) return prepare<i32, f64>(from, width, height, n, mask, to, offset, counting, threshold, squares);
  return prepare<f64, f64>(from, width, height, n, mask, to, offset, counting, threshold, squares);
}

/** values *= factor, n even. */
export function scaleFrame(at: usize, n: i32, factor: f64): void {
  const factors = f64x2.splat(factor);
  for (let i = 0; i < n; i += 2) {
    v128.store(at, f64x2.mul(v128.load(at), factors));
    at += 16;
  }
}

@inline
function addTo(at: usize, value: v128): void {
  v128.store(at, f64x2.add(v128.load(at), value));
}

/**
 * Slots 0 to `count`, consecutive frames: adds I and I^2 of slots `from` to `count` to `sum` and `sumSquares`, and
 * D^2 / 2 of D = slot(k) - slot(k+1) to `diagonal` (f64, padded as the frames). Writes the projections of D on x,
 * across[k][columns], and on y, down[k][padded rows].
 */
@inline
function sums<S>(
  slots: usize, slotBytes: usize, from: i32, count: i32, columns: i32, rows: i32, sum: usize, sumSquares: usize,
  diagonal: usize, across: usize, down: usize, downBytes: usize, scratch: usize,
): void {
  const acrossBytes = <usize>columns << 3;
  const zero = f64x2.splat(0);
  const half = f64x2.splat(0.5);
  for (let i: usize = 0; i < <usize>count * acrossBytes; i += 16) v128.store(across + i, zero);
  let at: usize = 0;
  for (let y = 0; y < rows; y++) {
    for (let k = 0; k < count; k++) v128.store(scratch + (<usize>k << 4), zero);
    for (let x = 0; x < columns; x += 4) {
      let slot = slots + at * sizeof<S>();
      let beforeLow: v128;
      let beforeHigh: v128;
      if (sizeof<S>() == 4) {
        const four = v128.load(slot);
        beforeLow = f64x2.promote_low_f32x4(four);
        beforeHigh = f64x2.promote_low_f32x4(upper(four));
      } else {
        beforeLow = v128.load(slot);
        beforeHigh = v128.load(slot, 16);
      }
      let sumLow = zero;
      let sumHigh = zero;
      let squareLow = zero;
      let squareHigh = zero;
      let ownLow = zero;
      let ownHigh = zero;
      if (from == 0) {
        sumLow = beforeLow;
        sumHigh = beforeHigh;
        squareLow = f64x2.mul(beforeLow, beforeLow);
        squareHigh = f64x2.mul(beforeHigh, beforeHigh);
      }
      let low: v128;
      let high: v128;
      let column = across + (<usize>x << 3);
      for (let k = 0; k < count; k++) {
        slot += slotBytes;
        if (sizeof<S>() == 4) {
          const four = v128.load(slot);
          low = f64x2.promote_low_f32x4(four);
          high = f64x2.promote_low_f32x4(upper(four));
        } else {
          low = v128.load(slot);
          high = v128.load(slot, 16);
        }
        sumLow = f64x2.add(sumLow, low);
        sumHigh = f64x2.add(sumHigh, high);
        squareLow = f64x2.add(squareLow, f64x2.mul(low, low));
        squareHigh = f64x2.add(squareHigh, f64x2.mul(high, high));
        const lessLow = f64x2.sub(beforeLow, low);
        const lessHigh = f64x2.sub(beforeHigh, high);
        ownLow = f64x2.add(ownLow, f64x2.mul(lessLow, lessLow));
        ownHigh = f64x2.add(ownHigh, f64x2.mul(lessHigh, lessHigh));
        addTo(column, lessLow);
        addTo(column + 16, lessHigh);
        addTo(scratch + (<usize>k << 4), f64x2.add(lessLow, lessHigh));
        beforeLow = low;
        beforeHigh = high;
        column += acrossBytes;
      }
      const to = at << 3;
      addTo(sum + to, sumLow);
      addTo(sum + to + 16, sumHigh);
      addTo(sumSquares + to, squareLow);
      addTo(sumSquares + to + 16, squareHigh);
      addTo(diagonal + to, f64x2.mul(half, ownLow));
      addTo(diagonal + to + 16, f64x2.mul(half, ownHigh));
      at += 4;
    }
    for (let k = 0; k < count; k++) {
      store<f64>(down + <usize>k * downBytes + (<usize>y << 3), horizontal(v128.load(scratch + (<usize>k << 4))));
    }
  }
}

export function addSums(
  double: bool, slots: usize, slotBytes: usize, from: i32, count: i32, columns: i32, rows: i32, sum: usize,
  sumSquares: usize, diagonal: usize, across: usize, down: usize, downBytes: usize, scratch: usize,
): void {
  if (double) {
    sums<f64>(slots, slotBytes, from, count, columns, rows, sum, sumSquares, diagonal, across, down, downBytes, scratch);
  } else {
    sums<f32>(slots, slotBytes, from, count, columns, rows, sum, sumSquares, diagonal, across, down, downBytes, scratch);
  }
}

/** Upper triangle, in tiles of four: joint[j][i] += sum_k v[k][i] v[k][j] / 2 for i >= j; n a multiple of 4. */
export function addOuters(vectors: usize, count: i32, n: i32, joint: usize): void {
  const bytes = <usize>n << 3;
  const half = f64x2.splat(0.5);
  for (let j = 0; j < n; j += 4) {
    for (let i = j; i < n; i += 4) {
      let a0 = f64x2.splat(0);
      let a1 = a0;
      let b0 = a0;
      let b1 = a0;
      let c0 = a0;
      let c1 = a0;
      let d0 = a0;
      let d1 = a0;
      let p = vectors;
      for (let k = 0; k < count; k++) {
        const x0 = v128.load(p + (<usize>i << 3));
        const x1 = v128.load(p + (<usize>i << 3), 16);
        const y = p + (<usize>j << 3);
        const w0 = v128.load64_splat(y);
        a0 = f64x2.add(a0, f64x2.mul(w0, x0));
        a1 = f64x2.add(a1, f64x2.mul(w0, x1));
        const w1 = v128.load64_splat(y, 8);
        b0 = f64x2.add(b0, f64x2.mul(w1, x0));
        b1 = f64x2.add(b1, f64x2.mul(w1, x1));
        const w2 = v128.load64_splat(y, 16);
        c0 = f64x2.add(c0, f64x2.mul(w2, x0));
        c1 = f64x2.add(c1, f64x2.mul(w2, x1));
        const w3 = v128.load64_splat(y, 24);
        d0 = f64x2.add(d0, f64x2.mul(w3, x0));
        d1 = f64x2.add(d1, f64x2.mul(w3, x1));
        p += bytes;
      }
      let to = joint + <usize>j * bytes + (<usize>i << 3);
      addTo(to, f64x2.mul(half, a0));
      addTo(to + 16, f64x2.mul(half, a1));
      to += bytes;
      addTo(to, f64x2.mul(half, b0));
      addTo(to + 16, f64x2.mul(half, b1));
      to += bytes;
      addTo(to, f64x2.mul(half, c0));
      addTo(to + 16, f64x2.mul(half, c1));
      to += bytes;
      addTo(to, f64x2.mul(half, d0));
      addTo(to + 16, f64x2.mul(half, d1));
    }
  }
}
