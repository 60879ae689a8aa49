// The same maps by pairs of lit pixels, for frames that are mostly zero. Twin: `FrameSpectra`, to the last integer.
//
// Lit pixels are listed as three columns of i32, `span` bytes apart, place, index and value: place = 4 (y pad + x), a byte offset into maps of `pad` = 2 W columns, so
// that sums and differences of places are addresses; index = y columns + x in its slot. With D = I - J,
//   D D / 2 = (I I + J J)/2 - sym(I J),
// so a frame inside a run counts its own pairs once and those with the next frame once: 1.5 n^2 pairs a frame. Maps are
// i32 and hold twice the sums; difference maps hold both orders of a pair on one side.

const LIT: usize = 4;

/**
 * Lists a slot of f32 that are whole numbers below 2^12 in size. Returns how many, or -1 where there are more than
 * `limit` or another number. Writes the sum of squares at `squares` and whether all values are 1 behind it.
 */
export function listLit(
  slot: usize, columns: i32, rows: i32, pad: i32, limit: i32, list: usize, span: usize, squares: usize,
): i32 {
  const zero = f32x4.splat(0);
  let n = 0;
  let square: f64 = 0;
  let ones = 1;
  let at = slot;
  for (let y = 0; y < rows; y++) {
    for (let x = 0; x < columns; x += 4) {
      const lit = i32x4.bitmask(f32x4.ne(v128.load(at), zero));
      if (lit != 0) {
        if (n + 4 > limit) return -1;
        for (let lane = 0; lane < 4; lane++) {
          if (((lit >> lane) & 1) == 0) continue;
          const value = load<f32>(at + (<usize>lane << 2));
          const whole = <i32>value;
          if (<f32>whole != value || abs(whole) >= 4096) return -1;
          const to = list + <usize>n * LIT;
          store<i32>(to, (y * pad + x + lane) << 2);
          store<i32>(to + span, y * columns + x + lane);
          store<i32>(to + 2 * span, whole);
          square += <f64>(whole * whole);
          if (whole != 1) ones = 0;
          n++;
        }
      }
      at += 16;
    }
  }
  store<f64>(squares, square);
  store<i32>(squares, ones, 8);
  return n;
}

@inline
function bump(at: usize, by: i32): void {
  store<i32>(at, load<i32>(at) + by);
}

/** Pairs of one list with itself, `weight` times; `middle` is the address of lag (0, 0). */
export function addOwnPairs(
  list: usize, n: i32, span: usize, weight: i32, ones: bool, plus: usize, middle: usize,
): void {
  const end = list + <usize>n * LIT;
  for (let p = list; p < end; p += LIT) {
    const place = load<i32>(p);
    const value = load<i32>(p + 2 * span);
    const sums = plus + place;
    const lags = middle - place;
    bump(sums + place, weight * value * value);
    bump(middle, weight * value * value);
    const twice = 2 * weight * value;
    if (ones) {
      for (let q = p + LIT; q < end; q += LIT) {
        const other = <usize>load<i32>(q);
        bump(sums + other, twice);
        bump(lags + other, twice);
      }
    } else {
      for (let q = p + LIT; q < end; q += LIT) {
        const other = <usize>load<i32>(q);
        const by = twice * load<i32>(q + 2 * span);
        bump(sums + other, by);
        bump(lags + other, by);
      }
    }
  }
}

/** Pairs of two lists, taken off twice. */
export function takeCrossPairs(
  a: usize, countA: i32, b: usize, countB: i32, span: usize, ones: bool, plus: usize, middle: usize,
): void {
  const endA = a + <usize>countA * LIT;
  const endB = b + <usize>countB * LIT;
  for (let p = a; p < endA; p += LIT) {
    const place = load<i32>(p);
    const sums = plus + place;
    const lags = middle - place;
    if (ones) {
      for (let q = b; q < endB; q += LIT) {
        const other = <usize>load<i32>(q);
        bump(sums + other, -2);
        bump(lags + other, -2);
      }
    } else {
      const twice = -2 * load<i32>(p + 2 * span);
      for (let q = b; q < endB; q += LIT) {
        const other = <usize>load<i32>(q);
        const by = twice * load<i32>(q + 2 * span);
        bump(sums + other, by);
        bump(lags + other, by);
      }
    }
  }
}

@inline
function add(at: usize, index: i32, by: f64): void {
  const to = at + (<usize>index << 3);
  store<f64>(to, load<f64>(to) + by);
}

/**
 * What `addSums` adds, from the lists of slot k and of the next one (n values each): the next frame's I and I^2, D^2/2
 * of both, and the projections of D. The earlier frame's I and I^2 only where it is `fresh`.
 */
export function addListSums(
  now: usize, countNow: i32, next: usize, countNext: i32, span: usize, slot: usize, fresh: bool, columns: i32, sum: usize,
  sumSquares: usize, diagonal: usize, across: usize, down: usize,
): void {
  for (let p = now; p < now + <usize>countNow * LIT; p += LIT) {
    const index = load<i32>(p + span);
    const value = <f64>load<i32>(p + 2 * span);
    if (fresh) {
      add(sum, index, value);
      add(sumSquares, index, value * value);
    }
    add(diagonal, index, 0.5 * value * value);
    add(across, index % columns, value);
    add(down, index / columns, value);
  }
  for (let p = next; p < next + <usize>countNext * LIT; p += LIT) {
    const index = load<i32>(p + span);
    const value = <f64>load<i32>(p + 2 * span);
    add(sum, index, value);
    add(sumSquares, index, value * value);
    add(diagonal, index, value * (0.5 * value - <f64>load<f32>(slot + (<usize>index << 2))));
    add(across, index % columns, -value);
    add(down, index / columns, -value);
  }
}

/** Brings the pair maps to the maps in f64 and clears them. */
export function flushPairs(
  pairs: usize, middle: usize, pairsBytes: usize, width: i32, height: i32, pad: i32, plus: usize, minus: usize,
): void {
  const wide = 2 * width - 1;
  for (let y = 0; y < 2 * height - 1; y++) {
    for (let x = 0; x < wide; x++) {
      add(plus, y * wide + x, 0.5 * <f64>load<i32>(pairs + (<usize>(y * pad + x) << 2)));
      const lag = ((y - height + 1) * pad + x - width + 1) << 2;
      const both = <f64>load<i32>(middle + lag) + <f64>load<i32>(middle - lag);
      add(minus, y * wide + x, 0.25 * both);
    }
  }
  memory.fill(pairs, 0, pairsBytes);
}
