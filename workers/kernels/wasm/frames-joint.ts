// Full joint distribution of a small region, J(i, j) = sum_k D_k(i) D_k(j) / 2 for i <= j, n x n values of f32.
// Twin: `ReadableJoint` (../joint-distribution.ts). Lists are those of frames-pairs.ts with place = 4 i.

const LIT: usize = 4;

/**
 * Differences of `count` + 1 rows of n values (n a multiple of 8) as panels of eight pixels: [panel][k][8], so that a tile
 * of J reads two short stretches from the first cache.
 */
export function packDifferences(rows: usize, count: i32, n: i32, panels: usize): void {
  const bytes = <usize>n << 2;
  for (let k = 0; k < count; k++) {
    const row = rows + <usize>k * bytes;
    let to = panels + <usize>k * 32;
    for (let x: usize = 0; x < bytes; x += 32) {
      const p = row + x;
      v128.store(to, f32x4.sub(v128.load(p), v128.load(p + bytes)));
      v128.store(to, f32x4.sub(v128.load(p, 16), v128.load(p + bytes, 16)), 16);
      to += <usize>count * 32;
    }
  }
}

@inline
function addHalf(at: usize, value: v128): void {
  v128.store(at, f32x4.add(v128.load(at), f32x4.mul(f32x4.splat(0.5), value)));
}

/** Four rows of one tile of eight columns: sums over k stay in registers. */
function addTile(left: usize, right: usize, count: i32, to: usize, bytes: usize): void {
  let a0 = f32x4.splat(0);
  let a1 = a0;
  let b0 = a0;
  let b1 = a0;
  let c0 = a0;
  let c1 = a0;
  let d0 = a0;
  let d1 = a0;
  const end = right + <usize>count * 32;
  for (let p = right; p < end; p += 32) {
    const x0 = v128.load(p);
    const x1 = v128.load(p, 16);
    const w0 = v128.load32_splat(left);
    a0 = f32x4.add(a0, f32x4.mul(w0, x0));
    a1 = f32x4.add(a1, f32x4.mul(w0, x1));
    const w1 = v128.load32_splat(left, 4);
    b0 = f32x4.add(b0, f32x4.mul(w1, x0));
    b1 = f32x4.add(b1, f32x4.mul(w1, x1));
    const w2 = v128.load32_splat(left, 8);
    c0 = f32x4.add(c0, f32x4.mul(w2, x0));
    c1 = f32x4.add(c1, f32x4.mul(w2, x1));
    const w3 = v128.load32_splat(left, 12);
    d0 = f32x4.add(d0, f32x4.mul(w3, x0));
    d1 = f32x4.add(d1, f32x4.mul(w3, x1));
    left += 32;
  }
  addHalf(to, a0);
  addHalf(to + 16, a1);
  addHalf(to + bytes, b0);
  addHalf(to + bytes + 16, b1);
  addHalf(to + 2 * bytes, c0);
  addHalf(to + 2 * bytes + 16, c1);
  addHalf(to + 3 * bytes, d0);
  addHalf(to + 3 * bytes + 16, d1);
}

/** J += D D / 2 of packed differences, tiles on and above the diagonal (which fill some cells below it). */
export function addJoint(panels: usize, count: i32, n: i32, joint: usize): void {
  const bytes = <usize>n << 2;
  const panel = <usize>count * 32;
  for (let j = 0; j < n; j += 8) {
    const left = panels + <usize>(j >> 3) * panel;
    for (let i = j; i < n; i += 8) {
      const right = panels + <usize>(i >> 3) * panel;
      const to = joint + <usize>j * bytes + (<usize>i << 2);
      addTile(left, right, count, to, bytes);
      addTile(left + 16, right, count, to + 4 * bytes, bytes);
    }
  }
}

@inline
function bump(at: usize, by: f32): void {
  store<f32>(at, load<f32>(at) + by);
}

/** J(i, j) += weight x(i) x(j), i <= j, of one list in order of pixels. */
export function addOwnJoint(
  list: usize, count: i32, span: usize, weight: f32, ones: bool, joint: usize, n: i32,
): void {
  const end = list + <usize>count * LIT;
  for (let p = list; p < end; p += LIT) {
    const row = joint + <usize>load<i32>(p) * <usize>n;
    const value = weight * <f32>load<i32>(p + 2 * span);
    if (ones) {
      for (let q = p; q < end; q += LIT) bump(row + <usize>load<i32>(q), weight);
    } else {
      for (let q = p; q < end; q += LIT) bump(row + <usize>load<i32>(q), value * <f32>load<i32>(q + 2 * span));
    }
  }
}

/** J(i, j) -= (x(i) y(j) + y(i) x(j))/2, i <= j, of two lists in order of pixels. */
export function takeCrossJoint(
  a: usize, countA: i32, b: usize, countB: i32, span: usize, joint: usize, n: i32,
): void {
  const endA = a + <usize>countA * LIT;
  const endB = b + <usize>countB * LIT;
  for (let p = a; p < endA; p += LIT) {
    const place = load<i32>(p);
    const half = <f32>-0.5 * <f32>load<i32>(p + 2 * span);
    const column = joint + <usize>place;
    const row = joint + <usize>place * <usize>n;
    let q = b;
    for (; q < endB; q += LIT) {
      const other = load<i32>(q);
      if (other >= place) break;
      bump(column + <usize>other * <usize>n, half * <f32>load<i32>(q + 2 * span));
    }
    if (q < endB && load<i32>(q) == place) {
      bump(row + <usize>place, 2 * half * <f32>load<i32>(q + 2 * span));
      q += LIT;
    }
    for (; q < endB; q += LIT) bump(row + <usize>load<i32>(q), half * <f32>load<i32>(q + 2 * span));
  }
}
