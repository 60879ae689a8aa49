// All-pairs scans of one merged, time-ordered stream that count at once. Twins of ../tag-scan.ts and ../tag-merged.ts.
//
// Neighbour by neighbour instead of tag by tag: first all tags whose next tag is within reach, then those of them whose
// next but one is, and so on. Each step writes the survivors without a branch, because whether a neighbour is near is
// a matter of chance and a mispredicted branch costs more than the comparison.

/** Byte offsets of the scan's settings (see ../histogram-scan.ts). */
const SITES_A: usize = 0;
const BINS: usize = 4;
const HISTOGRAM: usize = 8;
const LIST: usize = 12;
const REACH_A: usize = 16;
const REACH_B: usize = 24;
const LO: usize = 32;
const BIN: usize = 40;

/** Tags a round: their times, sites and list stay in the first-level cache. */
export const ROUND: i32 = 2048;
/** 1.5 * 2^52: the last bits of its sum with a whole number are that number. */
export const ROUNDER: f64 = 6755399441055744;

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
function within(time: usize, ahead: usize, reach: v128): v128 {
  return f64x2.le(f64x2.sub(v128.load(time + ahead), v128.load(time)), reach);
}

// @ts-ignore: decorator
@inline
export function lows(a: v128, b: v128): v128 {
  return i8x16.shuffle(a, b, 0, 1, 2, 3, 8, 9, 10, 11, 16, 17, 18, 19, 24, 25, 26, 27);
}

/** The difference where `first` is -1, its negative where it is 0. */
// @ts-ignore: decorator
@inline
export function signed(difference: f64, first: i32): f64 {
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

/** Lists those i of [0, count) with time[i + k] - time[i] <= reach. */
export function listNear(time: usize, count: i32, k: i32, reach: f64, list: usize): i32 {
  const reaches = f64x2.splat(reach);
  const ahead = <usize>k << 3;
  const first = list;
  let i = 0;
  let base = i16x8.splat(0);
  const eight = i16x8.splat(8);
  for (; i + 8 <= count; i += 8) {
    const at = time + (<usize>i << 3);
    const near = i16x8.narrow_i32x4_s(
      lows(within(at, ahead, reaches), within(at + 16, ahead, reaches)),
      lows(within(at + 32, ahead, reaches), within(at + 48, ahead, reaches)),
    );
    const mask = i16x8.bitmask(near);
    v128.store(list, i16x8.add(v128.load(PLACES + (<usize>mask << 4)), base));
    list += <usize>popcnt(mask) << 1;
    base = i16x8.add(base, eight);
  }
  for (; i < count; i++) {
    const at = time + (<usize>i << 3);
    store<u16>(list, <u16>i);
    list += <usize>(load<f64>(at + ahead) - load<f64>(at) <= reach) << 1;
  }
  return <i32>((list - first) >> 1);
}

/** First index of sorted [0, stop) whose time is at least `t`, else `stop`. */
export function binaryFirst(time: usize, stop: i32, t: f64): i32 {
  let low = 0;
  while (low < stop) {
    const middle = (low + stop) >>> 1;
    if (load<f64>(time + (<usize>middle << 3)) < t) low = middle + 1;
    else stop = middle;
  }
  return low;
}

/** Delay histogram of the pairs within sorted tags [start, stop) that begin in [start, startStop). */
export function scanTags(plan: usize, time: usize, site: usize, start: i32, startStop: i32, stop: i32): void {
  const sitesA = load<i32>(plan + SITES_A);
  const bins = load<i32>(plan + BINS);
  const histogram = load<usize>(plan + HISTOGRAM);
  const list = load<usize>(plan + LIST);
  const lo = load<f64>(plan + LO);
  const bin = load<f64>(plan + BIN);
  const perBin = 1 / bin;
  const reach = max(load<f64>(plan + REACH_A), load<f64>(plan + REACH_B));
  for (let round = start; round < startStop; round += ROUND) {
    const timeOf = time + (<usize>round << 3);
    const siteOf = site + (<usize>round << 2);
    // The last tag of all has no next one.
    let near = listNear(timeOf, min(min(ROUND, startStop - round), stop - round - 1), 1, reach, list);
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
        const first = (s - sitesA) >> 31;
        const differ = (first ^ ((other - sitesA) >> 31)) & 1;
        // Which arm is first is a matter of chance too: choices are made by masks.
        const tau = signed(load<f64>(there) - t, first);
        const cell = binOf(tau - lo, bin, perBin);
        const isIn = differ & <i32>(<u64>cell < <u64>bins);
        const counter = histogram + (<usize>(bins + ((<i32>cell - bins) & -isIn)) << 2);
        store<u32>(counter, load<u32>(counter) + 1);
        store<u16>(list + (<usize>survivors << 1), <u16>i);
        const reachOf = load<f64>(plan + REACH_A + <usize>(~first & 8));
        survivors += <i32>(i < room) & <i32>(load<f64>(there, 8) - t <= reachOf);
      }
      near = survivors;
    }
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
    const timeOf = time + (<usize>round << 3);
    const siteOf = site + (<usize>round << 2);
    let near = listNear(timeOf, min(min(ROUND, startStop - round), stop - round - 1), 1, reach, list);
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
