// Scans of two or three sorted lists of times. Twins in ../tag-lists.ts. The lower end of each tag's window only ever
// moves forward; it advances by counting how many of the next four are still below, because how far it moves is a
// matter of chance. Lists end with four times of +Infinity, so that nothing asks for the end.

const ROUND: i32 = 2048;

const HISTOGRAM: i32 = 0;
const MATRIX: i32 = 1;
const IMAGE: i32 = 2;

// @ts-ignore: decorator
@inline
function below(at: usize, from: v128): i32 {
  const first = f64x2.lt(v128.load(at), from);
  const second = f64x2.lt(v128.load(at, 16), from);
  // The list is sorted, so the four answers are ones followed by zeros.
  return popcnt(
    i32x4.bitmask(i8x16.shuffle(first, second, 0, 1, 2, 3, 8, 9, 10, 11, 16, 17, 18, 19, 24, 25, 26, 27)),
  );
}

// @ts-ignore: decorator
@inline
function advance(pointer: usize, from: f64): usize {
  const limit = f64x2.splat(from);
  let step = below(pointer, limit);
  pointer += <usize>step << 3;
  while (step == 4) {
    step = below(pointer, limit);
    pointer += <usize>step << 3;
  }
  return pointer;
}

/** The first y from `pointer` on that is not below `from`: doubling steps, then halving ones. */
function leap(pointer: usize, end: usize, from: f64): usize {
  let step: usize = 64;
  while (pointer + step < end && load<f64>(pointer + step) < from) {
    pointer += step;
    step <<= 1;
  }
  let low = pointer;
  let high = min(pointer + step, end);
  while (low < high) {
    const middle = low + (((high - low) >> 4) << 3);
    if (load<f64>(middle) < from) low = middle + 8;
    else high = middle;
  }
  return low;
}

/**
 * For every x of the first list, the y of the second with lo <= y - x <= hi. `low` is an index into the second not
 * past the first such y of the first x. `list` has room for 2048 32-bit and 2048 16-bit numbers.
 *
 * A round of x is gone through in four places at once: each step of a lower end waits for the one before it, and four
 * that do not know of each other wait together.
 */
// @ts-ignore: decorator
@inline
function scanLists(
  kind: i32, x: usize, valueX: usize, nX: i32, y: usize, valueY: usize, nY: i32, low: i32, lo: f64, hi: f64,
  bin: f64, stride: i32, out: usize, list: usize,
): i32 {
  const places = list;
  const items = list + (<usize>ROUND << 2);
  const end = y + (<usize>nY << 3);
  let pointer = y + (<usize>low << 3);
  for (let round = 0; round < nX; round += ROUND) {
    const stop = min(ROUND, nX - round);
    const timeX = x + (<usize>round << 3);
    const siteX = valueX + (<usize>round << 1);
    const quarter = stop >> 2;
    const leg = <usize>quarter << 3;
    let p0 = pointer;
    let p1 = leap(p0, end, load<f64>(timeX + leg) + lo);
    let p2 = leap(p1, end, load<f64>(timeX + 2 * leg) + lo);
    let p3 = leap(p2, end, load<f64>(timeX + 3 * leg) + lo);
    let near = 0;
    for (let i = 0; i < quarter; i++) {
      const at = timeX + (<usize>i << 3);
      const t0 = load<f64>(at);
      const t1 = load<f64>(at + leg);
      const t2 = load<f64>(at + 2 * leg);
      const t3 = load<f64>(at + 3 * leg);
      p0 = advance(p0, t0 + lo);
      p1 = advance(p1, t1 + lo);
      p2 = advance(p2, t2 + lo);
      p3 = advance(p3, t3 + lo);
      store<u32>(places + (<usize>near << 2), <u32>p0);
      store<u16>(items + (<usize>near << 1), <u16>i);
      near += <i32>(load<f64>(p0) - t0 <= hi);
      store<u32>(places + (<usize>near << 2), <u32>p1);
      store<u16>(items + (<usize>near << 1), <u16>(i + quarter));
      near += <i32>(load<f64>(p1) - t1 <= hi);
      store<u32>(places + (<usize>near << 2), <u32>p2);
      store<u16>(items + (<usize>near << 1), <u16>(i + 2 * quarter));
      near += <i32>(load<f64>(p2) - t2 <= hi);
      store<u32>(places + (<usize>near << 2), <u32>p3);
      store<u16>(items + (<usize>near << 1), <u16>(i + 3 * quarter));
      near += <i32>(load<f64>(p3) - t3 <= hi);
    }
    pointer = p3;
    for (let i = 4 * quarter; i < stop; i++) {
      const t = load<f64>(timeX + (<usize>i << 3));
      pointer = advance(pointer, t + lo);
      store<u32>(places + (<usize>near << 2), <u32>pointer);
      store<u16>(items + (<usize>near << 1), <u16>i);
      near += <i32>(load<f64>(pointer) - t <= hi);
    }
    while (near > 0) {
      let survivors = 0;
      for (let n = 0; n < near; n++) {
        const at = <usize>load<u32>(places + (<usize>n << 2));
        const i = <usize>load<u16>(items + (<usize>n << 1));
        const t = load<f64>(timeX + (i << 3));
        let cell: i32;
        if (kind == HISTOGRAM) cell = <i32>((load<f64>(at) - t - lo) / bin);
        else if (kind == MATRIX) {
          cell = <i32>load<u16>(valueY + ((at - y) >> 2)) * stride + <i32>load<u16>(siteX + (i << 1));
        } else cell = <i32>load<u16>(siteX + (i << 1));
        const counter = out + (<usize>cell << 2);
        store<u32>(counter, load<u32>(counter) + 1);
        store<u32>(places + (<usize>survivors << 2), <u32>at + 8);
        store<u16>(items + (<usize>survivors << 1), <u16>i);
        survivors += <i32>(load<f64>(at, 8) - t <= hi);
      }
      near = survivors;
    }
  }
  return <i32>((pointer - y) >> 3);
}

/** out[(y - x - lo) / bin] += 1 (u32) for lo <= y - x < lo + bins * bin. Returns where the lower end came to. */
export function histogramLists(
  x: usize, nX: i32, y: usize, nY: i32, low: i32, lo: f64, bin: f64, bins: i32, out: usize, list: usize,
): i32 {
  // Whole ticks: the last one within is one below the end.
  return scanLists(HISTOGRAM, x, 0, nX, y, 0, nY, low, lo, lo + bin * <f64>bins - 1, bin, 0, out, list);
}

/** out[siteY][siteX] += 1 (u32), rows of `sitesX`, for lo <= y - x <= hi. */
export function matrixLists(
  x: usize, siteX: usize, nX: i32, y: usize, siteY: usize, nY: i32, low: i32, lo: f64, hi: f64, sitesX: i32, out: usize, list: usize,
): i32 {
  return scanLists(MATRIX, x, siteX, nX, y, siteY, nY, low, lo, hi, 1, sitesX, out, list);
}

/** out[siteX] += 1 (u32) for every y with lo <= y - x <= hi: the image that the herald list y gates. */
export function imageLists(
  x: usize, siteX: usize, nX: i32, y: usize, nY: i32, low: i32, lo: f64, hi: f64, out: usize, list: usize,
): i32 {
  return scanLists(IMAGE, x, siteX, nX, y, 0, nY, low, lo, hi, 1, 0, out, list);
}

/**
 * Per herald, n1 tags of the first arm and n2 of the second in their windows lo <= t - t_herald <= hi: adds to `out`
 * (four f64) the heralds with n1 > 0, those with n2 > 0, those with both, and sum n1 n2.
 */
export function countTriples(
  herald: usize, n: i32, one: usize, two: usize, lo1: f64, hi1: f64, lo2: f64, hi2: f64, out: usize,
): void {
  let low1 = one;
  let high1 = one;
  let low2 = two;
  let high2 = two;
  let singles1 = 0;
  let singles2 = 0;
  let both = 0;
  let products: f64 = 0;
  for (let i = 0; i < n; i++) {
    const t = load<f64>(herald + (<usize>i << 3));
    low1 = advance(low1, t + lo1);
    high1 = advance(high1, t + hi1 + 1);
    low2 = advance(low2, t + lo2);
    high2 = advance(high2, t + hi2 + 1);
    const n1 = <i32>((high1 - low1) >> 3);
    const n2 = <i32>((high2 - low2) >> 3);
    singles1 += <i32>(n1 > 0);
    singles2 += <i32>(n2 > 0);
    both += <i32>(n1 > 0) & <i32>(n2 > 0);
    products += <f64>n1 * <f64>n2;
  }
  store<f64>(out, load<f64>(out) + <f64>singles1);
  store<f64>(out, load<f64>(out, 8) + <f64>singles2, 8);
  store<f64>(out, load<f64>(out, 16) + <f64>both, 16);
  store<f64>(out, load<f64>(out, 24) + products, 24);
}
