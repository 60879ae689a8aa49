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

/** J(i, j) += scale x(i) x(j) for the lit pixels j of a list from `q` to `end`. */
@inline
function addRow(row: usize, scale: f32, q: usize, end: usize, span: usize, ones: bool): void {
  if (ones) for (; q < end; q += LIT) bump(row + <usize>load<i32>(q), scale);
  else for (; q < end; q += LIT) bump(row + <usize>load<i32>(q), scale * <f32>load<i32>(q + 2 * span));
}

/**
 * Pairs of the lit pixels of `frames` consecutive frames, i <= j: with `cross` what their differences give,
 * x_k x_k (half of the first and last) - (x_k y_(k+1) + y_(k+1) x_k)/2; without, x_k x_k of all. Row by row of J, so
 * that a row stays in the first cache while all frames add to it. `counts` has the lengths of the lists; `heads` room
 * for n, `starts` for `frames` and `links` for all entries.
 */
export function addJointPairs(
  lists: usize, listBytes: usize, counts: usize, frames: i32, ones: bool, cross: bool, joint: usize, n: i32,
  heads: usize, starts: usize, links: usize,
): void {
  const span = listBytes / 3;
  const capacity = <i32>(span >> 2);
  memory.fill(heads, 0xff, <usize>n << 2);
  // Frames that light a pixel, as a chain from its head.
  for (let k = frames - 1; k >= 0; k--) {
    const list = lists + <usize>k * listBytes;
    const count = load<i32>(counts + (<usize>k << 2));
    store<i32>(starts + (<usize>k << 2), 0);
    for (let e = 0; e < count; e++) {
      const head = heads + <usize>load<i32>(list + (<usize>e << 2));
      const entry = k * capacity + e;
      store<i32>(links + (<usize>entry << 2), load<i32>(head));
      store<i32>(head, entry);
    }
  }
  for (let i = 0; i < n; i++) {
    const row = joint + <usize>i * <usize>n * 4;
    let entry = load<i32>(heads + (<usize>i << 2));
    while (entry >= 0) {
      const k = entry / capacity;
      const list = lists + <usize>k * listBytes;
      const p = list + (<usize>(entry - k * capacity) << 2);
      const value = <f32>load<i32>(p + 2 * span);
      const end = list + (<usize>load<i32>(counts + (<usize>k << 2)) << 2);
      const weight: f32 = cross && (k == 0 || k == frames - 1) ? 0.5 : 1;
      addRow(row, weight * value, p, end, span, ones);
      if (cross) {
        if (k > 0) takeNeighbour(row, i, value, list - listBytes, k - 1, counts, starts, span, ones);
        if (k + 1 < frames) takeNeighbour(row, i, value, list + listBytes, k + 1, counts, starts, span, ones);
      }
      entry = load<i32>(links + (<usize>entry << 2));
    }
  }
}

/** Rows come in order, so where a frame's pixels from i on begin only moves up. */
@inline
function takeNeighbour(
  row: usize, i: i32, value: f32, list: usize, k: i32, counts: usize, starts: usize, span: usize, ones: bool,
): void {
  const count = load<i32>(counts + (<usize>k << 2));
  const mark = starts + (<usize>k << 2);
  let e = load<i32>(mark);
  while (e < count && load<i32>(list + (<usize>e << 2)) < i << 2) e++;
  store<i32>(mark, e);
  addRow(row, <f32>-0.5 * value, list + (<usize>e << 2), list + (<usize>count << 2), span, ones);
}
