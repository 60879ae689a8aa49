// All-pairs scans of one merged, time-ordered stream. Twin of ../tag-scan.ts.
//
// Neighbour by neighbour instead of tag by tag: first all tags whose next tag is within reach, then those of them whose
// next but one is, and so on. Each step writes the survivors without a branch, because whether a neighbour is near is
// a matter of chance and a mispredicted branch costs more than the comparison.

/** Byte offsets of the scan's settings (see ../scan-plan.ts). */
const SITES_A: usize = 0;
const BINS: usize = 4;
const HISTOGRAM: usize = 8;
const CANDIDATE_TIME: usize = 12;
const CANDIDATE_TAU: usize = 16;
const CANDIDATE_A: usize = 20;
const CANDIDATE_B: usize = 24;
const CAPACITY: usize = 28;
const LIST: usize = 32;
const WINDOWS: usize = 36;
/** Candidates at hand. */
const PAIRS: usize = 40;
/** 1 when candidates are wanted. */
const COLLECT: usize = 44;
const REACH_A: usize = 48;
const REACH_B: usize = 56;
const LO: usize = 64;
const BIN: usize = 72;
const HULL_LO: usize = 80;
const HULL_HI: usize = 88;
/** Where slices are: ring slot of the reference time, its offset into the slice, 1 / slice length. */
const SLOT: usize = 96;
const OFFSET: usize = 104;
const PER_TICK: usize = 112;
/** Where a scan stopped with the candidates full; STEP is 0 when none did. */
const STEP: usize = 120;
const STOPPED_AT: usize = 124;
const STOPPED_NEAR: usize = 128;
/** Windows, prompt first: lo, hi (f64), address of the store (u32). */
const WINDOW: usize = 136;
const WINDOW_BYTES: usize = 24;

/** Byte offsets of a store's settings: addresses of its counters and of the pixel tables, sizes. */
const STORE_PAIRS: usize = 0;
const STORE_JOINT_X: usize = 4;
const STORE_JOINT_Y: usize = 8;
const STORE_IMAGE_B: usize = 12;
const STORE_IMAGE_A: usize = 16;
const STORE_DIFFERENCE: usize = 20;
const STORE_SUM: usize = 24;
/** 0 when no matrix is kept. */
const STORE_MATRIX: usize = 28;
const STORE_X_A: usize = 32;
const STORE_Y_A: usize = 36;
const STORE_X_B: usize = 40;
const STORE_Y_B: usize = 44;
const STORE_WIDTH_A: usize = 48;
const STORE_HEIGHT_A: usize = 52;
const STORE_WIDTH_B: usize = 56;
const STORE_HEIGHT_B: usize = 60;

/** Tags a round: their times, sites and list stay in the first-level cache. */
const ROUND: i32 = 2048;
const SLOT_MASK: i32 = 127;
const ROUNDER: f64 = 6755399441055744;

/** For each byte of eight answers, the indices of the ones that are set, as eight 16-bit numbers. */
const PLACES = memory.data(4096, 16);
for (let mask = 0; mask < 256; mask++) {
  let at = PLACES + (<usize>mask << 4);
  for (let bit = 0; bit < 8; bit++) {
    if (((mask >> bit) & 1) == 0) continue;
    store<u16>(at, <u16>bit);
    at += 2;
  }
}

// @ts-ignore: decorator
@inline
function within(time: usize, reach: v128): v128 {
  return f64x2.le(f64x2.sub(v128.load(time, 8), v128.load(time)), reach);
}

// @ts-ignore: decorator
@inline
function lows(a: v128, b: v128): v128 {
  return i8x16.shuffle(a, b, 0, 1, 2, 3, 8, 9, 10, 11, 16, 17, 18, 19, 24, 25, 26, 27);
}

/** The difference where `first` is -1, its negative where it is 0. */
// @ts-ignore: decorator
@inline
function signed(difference: f64, first: i32): f64 {
  return reinterpret<f64>(reinterpret<i64>(difference) ^ (<i64>~first << 63));
}

/**
 * floor(from / bin) for whole numbers, quotients below 2^51: rounded by adding 1.5 * 2^52, whose last bits then are the
 * integer, and lowered where that is too large. Fewer steps than a division and a checked conversion.
 */
// @ts-ignore: decorator
@inline
function binOf(from: f64, bin: f64, perBin: f64): i64 {
  const rounded = from * perBin + ROUNDER;
  const excess = from - (rounded - ROUNDER) * bin;
  // A comparison and not the sign bit: the excess may be -0.
  return reinterpret<i64>(rounded) - reinterpret<i64>(ROUNDER) - <i64>(excess < 0);
}

/** Lists those i of [start, stop) - start with time[i + 1] - time[i] <= reach. time[stop] is read: it must be there. */
function listNear(time: usize, start: i32, stop: i32, reach: f64, list: usize): i32 {
  const reaches = f64x2.splat(reach);
  const first = list;
  let i = start;
  let base = i16x8.splat(0);
  const eight = i16x8.splat(8);
  for (; i + 8 <= stop; i += 8) {
    const at = time + (<usize>i << 3);
    const near = i16x8.narrow_i32x4_s(
      lows(within(at, reaches), within(at + 16, reaches)),
      lows(within(at + 32, reaches), within(at + 48, reaches)),
    );
    const mask = i16x8.bitmask(near);
    v128.store(list, i16x8.add(v128.load(PLACES + (<usize>mask << 4)), base));
    list += <usize>popcnt(mask) << 1;
    base = i16x8.add(base, eight);
  }
  for (; i < stop; i++) {
    const at = time + (<usize>i << 3);
    store<u16>(list, <u16>(i - start));
    list += <usize>(load<f64>(at, 8) - load<f64>(at) <= reach) << 1;
  }
  return <i32>((list - first) >> 1);
}

/**
 * Pairs within sorted tags [start, stop) that begin in [start, startStop): delay histogram, and candidates where they
 * are wanted. Returns 1 when the candidates are full: to be called again, the same way, once they are taken.
 */
export function scanTags(plan: usize, time: usize, site: usize, start: i32, startStop: i32, stop: i32): i32 {
  return load<i32>(plan + COLLECT) == 0
    ? scan(false, plan, time, site, start, startStop, stop)
    : scan(true, plan, time, site, start, startStop, stop);
}

// @ts-ignore: decorator
@inline
function scan(
  collects: bool, plan: usize, time: usize, site: usize, start: i32, startStop: i32, stop: i32,
): i32 {
  const sitesA = load<i32>(plan + SITES_A);
  const bins = load<i32>(plan + BINS);
  const histogram = load<usize>(plan + HISTOGRAM);
  const list = load<usize>(plan + LIST);
  const reachA = load<f64>(plan + REACH_A);
  const reachB = load<f64>(plan + REACH_B);
  const lo = load<f64>(plan + LO);
  const bin = load<f64>(plan + BIN);
  const perBin = 1 / bin;
  const hullLo = load<f64>(plan + HULL_LO);
  const hullHi = load<f64>(plan + HULL_HI);
  const capacity = load<i32>(plan + CAPACITY);
  const candidateTime = load<usize>(plan + CANDIDATE_TIME);
  const candidateTau = load<usize>(plan + CANDIDATE_TAU);
  const candidateA = load<usize>(plan + CANDIDATE_A);
  const candidateB = load<usize>(plan + CANDIDATE_B);
  const reach = max(reachA, reachB);
  let filled = collects ? load<i32>(plan + PAIRS) : 0;
  let k = collects ? load<i32>(plan + STEP) : 0;
  let round = start;
  let near = 0;
  if (k > 0) {
    round = load<i32>(plan + STOPPED_AT);
    near = load<i32>(plan + STOPPED_NEAR);
    store<i32>(plan + STEP, 0);
  }
  for (; round < startStop; round += ROUND) {
    if (k == 0) {
      // The last tag of all has no next one.
      near = listNear(time, round, min(min(round + ROUND, startStop), stop - 1), reach, list);
      k = 1;
    }
    const timeOf = time + (<usize>round << 3);
    const siteOf = site + (<usize>round << 2);
    for (; near > 0; k++) {
      if (collects && filled + near > capacity) {
        store<i32>(plan + PAIRS, filled);
        store<i32>(plan + STEP, k);
        store<i32>(plan + STOPPED_AT, round);
        store<i32>(plan + STOPPED_NEAR, near);
        return 1;
      }
      const room = stop - round - k - 1;
      let survivors = 0;
      for (let n = 0; n < near; n++) {
        const i = <i32>load<u16>(list + (<usize>n << 1));
        const here = timeOf + (<usize>i << 3);
        const there = here + (<usize>k << 3);
        const t = load<f64>(here);
        const s = load<i32>(siteOf + (<usize>i << 2));
        const other = load<i32>(siteOf + (<usize>(i + k) << 2));
        const first = (s - sitesA) >> 31;
        const differ = (first ^ ((other - sitesA) >> 31)) & 1;
        // Which arm is first is a matter of chance too: choices are made by masks.
        const tau = signed(load<f64>(there) - t, first);
        const cell = binOf(tau - lo, bin, perBin);
        const isIn = differ & <i32>(<u64>cell < <u64>bins);
        const counter = histogram + (<usize>(bins + ((<i32>cell - bins) & -isIn)) << 2);
        store<u32>(counter, load<u32>(counter) + 1);
        if (collects) {
          const a = other ^ ((s ^ other) & first);
          store<f64>(candidateTime + (<usize>filled << 3), load<f64>(here + <usize>((k << 3) & ~first)));
          store<f64>(candidateTau + (<usize>filled << 3), tau);
          store<i32>(candidateA + (<usize>filled << 2), a);
          store<i32>(candidateB + (<usize>filled << 2), (s ^ other ^ a) - sitesA);
          filled += differ & <i32>(tau >= hullLo) & <i32>(tau <= hullHi);
        }
        store<u16>(list + (<usize>survivors << 1), <u16>i);
        const reachOf = load<f64>(plan + REACH_A + <usize>(~first & 8));
        survivors += <i32>(i < room) & <i32>(load<f64>(there, 8) - t <= reachOf);
      }
      near = survivors;
    }
    k = 0;
  }
  if (collects) store<i32>(plan + PAIRS, filled);
  return 0;
}

/**
 * Pairs of one tag of the sorted left columns and one of the sorted right ones, whatever way their times overlap.
 * Returns 1 when the candidates are full, as `scanTags`.
 */
export function scanBetween(
  plan: usize, leftTime: usize, leftSite: usize, leftStop: i32, time: usize, site: usize, stop: i32,
): i32 {
  if (leftStop == 0 || stop == 0) return 0;
  const sitesA = load<i32>(plan + SITES_A);
  const bins = load<i32>(plan + BINS);
  const histogram = load<usize>(plan + HISTOGRAM);
  const lo = load<f64>(plan + LO);
  const bin = load<f64>(plan + BIN);
  const span = bin * <f64>bins;
  const hullLo = load<f64>(plan + HULL_LO);
  const hullHi = load<f64>(plan + HULL_HI);
  const collects = load<i32>(plan + COLLECT) != 0;
  const capacity = load<i32>(plan + CAPACITY);
  const reach = max(load<f64>(plan + REACH_A), load<f64>(plan + REACH_B));
  const lastUseful = load<f64>(leftTime + (<usize>(leftStop - 1) << 3)) + reach;
  let low = 0;
  let high = leftStop;
  const earliest = load<f64>(time) - reach;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (load<f64>(leftTime + (<usize>middle << 3)) < earliest) low = middle + 1;
    else high = middle;
  }
  let i = 0;
  let resumed = 0;
  if (load<i32>(plan + STEP) > 0) {
    i = load<i32>(plan + STOPPED_AT);
    resumed = load<i32>(plan + STOPPED_NEAR);
    store<i32>(plan + STEP, 0);
  }
  for (; i < stop; i++) {
    const t = load<f64>(time + (<usize>i << 3));
    if (t > lastUseful) break;
    const s = load<i32>(site + (<usize>i << 2));
    const first = s < sitesA;
    while (low < leftStop && load<f64>(leftTime + (<usize>low << 3)) < t - reach) low++;
    const from = max(low, resumed);
    resumed = 0;
    for (let j = from; j < leftStop; j++) {
      const u = load<f64>(leftTime + (<usize>j << 3));
      if (u > t + reach) break;
      const other = load<i32>(leftSite + (<usize>j << 2));
      if (other < sitesA == first) continue;
      const tau = first ? u - t : t - u;
      const isCandidate = collects && tau >= hullLo && tau <= hullHi;
      const filled = load<i32>(plan + PAIRS);
      if (isCandidate && filled == capacity) {
        store<i32>(plan + STEP, 1);
        store<i32>(plan + STOPPED_AT, i);
        store<i32>(plan + STOPPED_NEAR, j);
        return 1;
      }
      const past = tau - lo;
      if (past >= 0 && past < span) {
        const counter = histogram + (<usize>(<i32>(past / bin)) << 2);
        store<u32>(counter, load<u32>(counter) + 1);
      }
      if (!isCandidate) continue;
      store<f64>(load<usize>(plan + CANDIDATE_TIME) + (<usize>filled << 3), first ? t : u);
      store<f64>(load<usize>(plan + CANDIDATE_TAU) + (<usize>filled << 3), tau);
      store<i32>(load<usize>(plan + CANDIDATE_A) + (<usize>filled << 2), first ? s : other);
      store<i32>(load<usize>(plan + CANDIDATE_B) + (<usize>filled << 2), (first ? other : s) - sitesA);
      store<i32>(plan + PAIRS, filled + 1);
    }
  }
  return 0;
}

/** Counts the candidates at hand in every window they lie in; then there are none. */
export function countWindows(plan: usize): void {
  const filled = load<i32>(plan + PAIRS);
  const windows = load<i32>(plan + WINDOWS);
  for (let w = 0; w < windows; w++) {
    const window = plan + WINDOW + <usize>w * WINDOW_BYTES;
    countWindow(plan, filled, load<f64>(window), load<f64>(window, 8), load<usize>(window, 16));
  }
  store<i32>(plan + PAIRS, 0);
}

// @ts-ignore: decorator
@inline
function addOne(counters: usize, cell: i32): void {
  const at = counters + (<usize>cell << 3);
  store<f64>(at, load<f64>(at) + 1);
}

/** Counts the candidates with lo <= tau <= hi: per slice, maps per slice, difference, sum and channel pairs. */
function countWindow(plan: usize, filled: i32, lo: f64, hi: f64, into: usize): void {
  const slotAt = load<i32>(plan + SLOT);
  const offset = load<f64>(plan + OFFSET);
  const perTick = load<f64>(plan + PER_TICK);
  const widthA = load<i32>(into + STORE_WIDTH_A);
  const heightA = load<i32>(into + STORE_HEIGHT_A);
  const widthB = load<i32>(into + STORE_WIDTH_B);
  const heightB = load<i32>(into + STORE_HEIGHT_B);
  const width = widthA + widthB - 1;
  const centre = (heightA - 1) * width + widthA - 1;
  const pixelsA = widthA * heightA;
  const pixelsB = widthB * heightB;
  const taus = load<usize>(plan + CANDIDATE_TAU);
  const times = load<usize>(plan + CANDIDATE_TIME);
  const sitesA = load<usize>(plan + CANDIDATE_A);
  const sitesB = load<usize>(plan + CANDIDATE_B);
  const matrix = load<usize>(into + STORE_MATRIX);
  const columnsA = load<usize>(into + STORE_X_A);
  const rowsA = load<usize>(into + STORE_Y_A);
  const columnsB = load<usize>(into + STORE_X_B);
  const rowsB = load<usize>(into + STORE_Y_B);
  for (let n = 0; n < filled; n++) {
    const tau = load<f64>(taus + (<usize>n << 3));
    if (!(tau >= lo && tau <= hi)) continue;
    const a = load<i32>(sitesA + (<usize>n << 2));
    const b = load<i32>(sitesB + (<usize>n << 2));
    const past = floor((load<f64>(times + (<usize>n << 3)) + offset) * perTick);
    const slot = (slotAt + <i32>(<i64>past)) & SLOT_MASK;
    const xA = load<i32>(columnsA + (<usize>a << 2));
    const yA = load<i32>(rowsA + (<usize>a << 2));
    const xB = load<i32>(columnsB + (<usize>b << 2));
    const yB = load<i32>(rowsB + (<usize>b << 2));
    addOne(load<usize>(into + STORE_PAIRS), slot);
    addOne(load<usize>(into + STORE_JOINT_X), (slot * widthB + xB) * widthA + xA);
    addOne(load<usize>(into + STORE_JOINT_Y), (slot * heightB + yB) * heightA + yA);
    addOne(load<usize>(into + STORE_IMAGE_B), slot * pixelsB + b);
    addOne(load<usize>(into + STORE_IMAGE_A), slot * pixelsA + a);
    addOne(load<usize>(into + STORE_DIFFERENCE), centre + (yB - yA) * width + xB - xA);
    addOne(load<usize>(into + STORE_SUM), (yA + yB) * width + xA + xB);
    if (matrix != 0) addOne(matrix, b * pixelsA + a);
  }
}

/**
 * Coincidence matrix of the merged stream: out[siteB - sitesA][siteA] += 1 (u32) for pairs with lo <= t_B - t_A <= hi
 * that begin in [start, startStop). `list` has room for 2048 16-bit numbers.
 */
export function matrixMerged(
  time: usize, site: usize, start: i32, startStop: i32, stop: i32, sitesA: i32, lo: f64, hi: f64, out: usize, list: usize,
): void {
  const reach = max(hi, -lo);
  for (let round = start; round < startStop; round += ROUND) {
    let near = listNear(time, round, min(min(round + ROUND, startStop), stop - 1), reach, list);
    const timeOf = time + (<usize>round << 3);
    const siteOf = site + (<usize>round << 2);
    for (let k = 1; near > 0; k++) {
      const room = stop - round - k - 1;
      let survivors = 0;
      for (let n = 0; n < near; n++) {
        const i = <i32>load<u16>(list + (<usize>n << 1));
        const here = timeOf + (<usize>i << 3);
        const there = here + (<usize>k << 3);
        const t = load<f64>(here);
        const s = load<i32>(siteOf + (<usize>i << 2));
        const other = load<i32>(siteOf + (<usize>(i + k) << 2));
        const first = s < sitesA;
        const later = load<f64>(there);
        const tau = first ? later - t : t - later;
        if (first != (other < sitesA) && tau >= lo && tau <= hi) {
          const cell = first ? (other - sitesA) * sitesA + s : (s - sitesA) * sitesA + other;
          const counter = out + (<usize>cell << 2);
          store<u32>(counter, load<u32>(counter) + 1);
        }
        store<u16>(list + (<usize>survivors << 1), <u16>i);
        survivors += <i32>(i < room) & <i32>(load<f64>(there, 8) - t <= reach);
      }
      near = survivors;
    }
  }
}
