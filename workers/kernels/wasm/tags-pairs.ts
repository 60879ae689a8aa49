// All pairs of one merged, time-ordered stream that lie within a range of tau, as columns; then their delay histogram
// and what they count in windows. Twin of ../tag-scan.ts with `WindowCounter`.
//
// Neighbour by neighbour, as in tags-scan.ts: all tags with their next one, with the next but one, and so on. While many
// tags have such a neighbour within reach, four at a time whether they have or not; from there on along the list of
// those that have. Pairs go to the columns by shuffles and sums instead of branches, because what is a pair is a matter
// of chance.

import { binaryFirst, listNear, lows, ROUND, ROUNDER, signed } from './tags-scan';

/** Byte offsets of the settings (see ../pair-scan.ts). */
const SITES_A: usize = 0;
const BINS: usize = 4;
const HISTOGRAM: usize = 8;
const LIST: usize = 12;
const RISES: usize = 16;
const PIXELS: usize = 20;
const CAPACITY: usize = 24;
/** Pairs at hand; all of one slice, but for those that are counted already. */
const PAIRS: usize = 28;
const COUNTED: usize = 32;
const WINDOWS: usize = 36;
/** One byte for each 2^TABLE_BITS ticks: 0 when no window is there, else 1 + its index, 255 when there are several. */
const TABLE: usize = 40;
const TABLE_BITS: usize = 44;
/** Ring slot of the slice that the pairs to be counted lie in. */
const SLOT: usize = 48;
/** Where a scan stopped; STEP is 0 when none did. */
const STEP: usize = 52;
const STOPPED_AT: usize = 56;
const STOPPED_NEAR: usize = 60;
const STOPPED_IN_LIST: usize = 64;
/** 1 when the range fits the 32-bit arithmetic of four tags at a time. */
const FITS: usize = 68;
/** Tags of the last round with their next one within reach, for a whole round. */
const LAST_NEAR: usize = 72;
const CHOSEN: usize = 76;
/** Largest tau above the smallest; of the histogram where it begins and ends above that, in whole ticks. */
const SPAN: usize = 80;
const FROM: usize = 84;
const LENGTH: usize = 88;
const REACH_A: usize = 96;
const REACH_B: usize = 104;
const MIN_TAU: usize = 112;
const BIN: usize = 120;
/** Where slices are: ring slot of the reference time, its offset into the slice, 1 / slice length. */
const OFFSET: usize = 128;
const PER_TICK: usize = 136;
const SLOT_AT: usize = 144;
/** Windows, prompt first: lowest and highest tau above the smallest (u32), address of the store (u32). */
const WINDOW: usize = 152;
const WINDOW_BYTES: usize = 16;

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

const SLOT_MASK: i32 = 127;
/** Differences of time are cut off here before they become 32-bit numbers; FITS says that the range ends below half. */
const FARTHEST: f64 = 1073741824;
/** Above one in so many tags with such a neighbour, four at a time are faster than the list. */
const DENSE: i32 = 5;
/** Pairs looked up in the table of windows at a time. */
const BATCH: i32 = 2048;

/** For each of 16 answers, the shuffle that moves the lanes which are set to the front. */
const FRONT = memory.data(256, 16);
for (let mask = 0; mask < 16; mask++) {
  let at = FRONT + (<usize>mask << 4);
  for (let lane = 0; lane < 4; lane++) {
    if (((mask >> lane) & 1) == 0) continue;
    store<u32>(at, 0x03020100 + 0x04040404 * lane);
    at += 4;
  }
}

/**
 * The pairs (i, i + k) for i in [0, count) of the columns: those in range are appended. Returns how many of them lie
 * within the larger reach, in range or not. Reads up to three tags past the last pair and writes as much past the last.
 */
function pairDense(plan: usize, time: usize, site: usize, count: i32, k: i32): i32 {
  const reach = f64x2.splat(max(load<f64>(plan + REACH_A), load<f64>(plan + REACH_B)));
  const farthest = f64x2.splat(FARTHEST);
  const rounder = f64x2.splat(ROUNDER);
  const sitesA = i32x4.splat(load<i32>(plan + SITES_A));
  const minTau = i32x4.splat(<i32>load<f64>(plan + MIN_TAU));
  const span = v128.load32_splat(plan + SPAN);
  const lanes = i32x4(0, 1, 2, 3);
  const timeAhead = <usize>k << 3;
  const siteAhead = <usize>k << 2;
  const filled = load<i32>(plan + PAIRS);
  const rises = load<usize>(plan + RISES);
  let rise = rises + (<usize>filled << 2);
  let pixel = load<usize>(plan + PIXELS) + (<usize>filled << 2);
  let far = i32x4.splat(0);
  for (let i = 0; i < count; i += 4) {
    const here = time + (<usize>i << 3);
    const there = here + timeAhead;
    const d0 = f64x2.sub(v128.load(there), v128.load(here));
    const d1 = f64x2.sub(v128.load(there, 16), v128.load(here, 16));
    const isThere = i32x4.lt_s(lanes, i32x4.splat(count - i));
    far = i32x4.sub(far, v128.and(isThere, lows(f64x2.le(d0, reach), f64x2.le(d1, reach))));
    // The low half of a double near 1.5 * 2^52 is its whole number.
    const difference = lows(
      f64x2.add(f64x2.pmin(farthest, d0), rounder),
      f64x2.add(f64x2.pmin(farthest, d1), rounder),
    );
    const at = site + (<usize>i << 2);
    const s = v128.load(at);
    const other = v128.load(at + siteAhead);
    const first = i32x4.lt_s(s, sitesA);
    const later = v128.not(first);
    const tau = i32x4.sub(v128.xor(difference, later), later);
    const above = i32x4.sub(tau, minTau);
    const differ = v128.and(isThere, v128.xor(first, i32x4.lt_s(other, sitesA)));
    const mask = i32x4.bitmask(v128.and(differ, i32x4.le_u(above, span)));
    const ofA = v128.bitselect(s, other, first);
    const ofB = i32x4.sub(v128.xor(v128.xor(s, other), ofA), sitesA);
    const front = v128.load(FRONT + (<usize>mask << 4));
    v128.store(rise, i8x16.swizzle(above, front));
    v128.store(pixel, i8x16.swizzle(v128.or(ofA, i32x4.shl(ofB, 16)), front));
    const more = <usize>popcnt(mask) << 2;
    rise += more;
    pixel += more;
  }
  store<i32>(plan + PAIRS, <i32>((rise - rises) >> 2));
  return (
    i32x4.extract_lane(far, 0) + i32x4.extract_lane(far, 1) + i32x4.extract_lane(far, 2) + i32x4.extract_lane(far, 3)
  );
}

/**
 * The pairs (i, i + k) for the `near` listed i: those in range are appended. Shortens the list to those with i + k + 1
 * below `room` within reach too; returns how many.
 */
function pairListed(plan: usize, time: usize, site: usize, near: i32, k: i32, room: i32): i32 {
  const list = load<usize>(plan + LIST);
  const sitesA = load<i32>(plan + SITES_A);
  const minTau = load<f64>(plan + MIN_TAU);
  const span = <u64>load<u32>(plan + SPAN);
  const rises = load<usize>(plan + RISES);
  const pixels = load<usize>(plan + PIXELS);
  const last = room - k - 1;
  let filled = load<i32>(plan + PAIRS);
  let survivors = 0;
  for (let n = 0; n < near; n++) {
    const i = <i32>load<u16>(list + (<usize>n << 1));
    const here = time + (<usize>i << 3);
    const there = here + (<usize>k << 3);
    const t = load<f64>(here);
    const s = load<i32>(site + (<usize>i << 2));
    const other = load<i32>(site + (<usize>(i + k) << 2));
    const first = (s - sitesA) >> 31;
    const differ = (first ^ ((other - sitesA) >> 31)) & 1;
    // Which arm is first is a matter of chance too: choices are made by masks.
    const above = signed(load<f64>(there) - t, first) - minTau;
    const rise = reinterpret<u64>(above + ROUNDER) - reinterpret<u64>(ROUNDER);
    const a = other ^ ((s ^ other) & first);
    store<u32>(rises + (<usize>filled << 2), <u32>rise);
    store<i32>(pixels + (<usize>filled << 2), a | (((s ^ other ^ a) - sitesA) << 16));
    filled += differ & <i32>(rise <= span);
    store<u16>(list + (<usize>survivors << 1), <u16>i);
    const reachOf = load<f64>(plan + REACH_A + <usize>(~first & 8));
    survivors += <i32>(i < last) & <i32>(load<f64>(there, 8) - t <= reachOf);
  }
  store<i32>(plan + PAIRS, filled);
  return survivors;
}

/**
 * Pairs within sorted tags [start, stop), all of one slice. Returns 1 when the columns are full: to be called again,
 * the same way, once they have room. Up to four tags past the last are read and not used.
 */
export function scanPairs(plan: usize, time: usize, site: usize, start: i32, stop: i32): i32 {
  const reach = max(load<f64>(plan + REACH_A), load<f64>(plan + REACH_B));
  const capacity = load<i32>(plan + CAPACITY) - ROUND;
  const fits = load<i32>(plan + FITS) != 0;
  let k = load<i32>(plan + STEP);
  let round = start;
  let near = 0;
  let inList = false;
  if (k > 0) {
    round = load<i32>(plan + STOPPED_AT);
    near = load<i32>(plan + STOPPED_NEAR);
    inList = load<i32>(plan + STOPPED_IN_LIST) != 0;
    store<i32>(plan + STEP, 0);
  }
  for (; round < stop; round += ROUND) {
    if (k == 0) {
      k = 1;
      near = load<i32>(plan + LAST_NEAR) * min(ROUND, stop - round) / ROUND;
      inList = false;
    }
    const timeOf = time + (<usize>round << 3);
    const siteOf = site + (<usize>round << 2);
    for (; ; k++) {
      if (load<i32>(plan + PAIRS) > capacity) {
        store<i32>(plan + STEP, k);
        store<i32>(plan + STOPPED_AT, round);
        store<i32>(plan + STOPPED_NEAR, near);
        store<i32>(plan + STOPPED_IN_LIST, inList ? 1 : 0);
        return 1;
      }
      if (!inList) {
        const count = min(ROUND, stop - round - k);
        if (count <= 0) break;
        if (fits && near * DENSE > count) {
          near = pairDense(plan, timeOf, siteOf, count, k);
          if (k == 1) store<i32>(plan + LAST_NEAR, near * ROUND / count);
          if (near == 0) break;
          continue;
        }
        near = listNear(timeOf, count, k, reach, load<usize>(plan + LIST));
        if (k == 1) store<i32>(plan + LAST_NEAR, near * ROUND / count);
        inList = true;
      }
      if (near == 0) break;
      near = pairListed(plan, timeOf, siteOf, near, k, stop - round);
    }
    k = 0;
  }
  return 0;
}

/**
 * Pairs of one tag of the sorted left columns and one of the sorted right ones, whatever way their times overlap.
 * Returns 1 when the columns are full, or hold pairs to be counted in another slice than the next one; as `scanPairs`.
 */
export function scanBetween(
  plan: usize, leftTime: usize, leftSite: usize, leftStop: i32, time: usize, site: usize, stop: i32,
): i32 {
  if (leftStop == 0 || stop == 0) return 0;
  const sitesA = load<i32>(plan + SITES_A);
  const minTau = load<f64>(plan + MIN_TAU);
  const span = <f64>load<u32>(plan + SPAN);
  const reach = max(load<f64>(plan + REACH_A), load<f64>(plan + REACH_B));
  const lastUseful = load<f64>(leftTime + (<usize>(leftStop - 1) << 3)) + reach;
  let low = binaryFirst(leftTime, leftStop, load<f64>(time) - reach);
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
      const above = (first ? u - t : t - u) - minTau;
      if (!(above >= 0 && above <= span)) continue;
      const slot = slotOf(plan, first ? t : u);
      const filled = load<i32>(plan + PAIRS);
      const waits = filled > load<i32>(plan + COUNTED);
      if (filled >= load<i32>(plan + CAPACITY) || (waits && slot != load<i32>(plan + SLOT))) {
        store<i32>(plan + STEP, 1);
        store<i32>(plan + STOPPED_AT, i);
        store<i32>(plan + STOPPED_NEAR, j);
        return 1;
      }
      store<i32>(plan + SLOT, slot);
      const a = first ? s : other;
      store<u32>(load<usize>(plan + RISES) + (<usize>filled << 2), <u32>above);
      store<i32>(load<usize>(plan + PIXELS) + (<usize>filled << 2), a | (((first ? other : s) - sitesA) << 16));
      store<i32>(plan + PAIRS, filled + 1);
    }
  }
  return 0;
}

function slotOf(plan: usize, time: f64): i32 {
  const past = floor((time + load<f64>(plan + OFFSET)) * load<f64>(plan + PER_TICK));
  return (load<i32>(plan + SLOT_AT) + <i32>(<i64>past)) & SLOT_MASK;
}

/** Counts the pairs at hand that are not counted yet: delay histogram, and every window they lie in. */
export function countPairs(plan: usize): void {
  const filled = load<i32>(plan + PAIRS);
  let from = load<i32>(plan + COUNTED);
  const rises = load<usize>(plan + RISES);
  const pixels = load<usize>(plan + PIXELS);
  if (load<i32>(plan + BINS) > 0) countHistogram(plan, rises + (<usize>from << 2), filled - from);
  if (load<i32>(plan + WINDOWS) > 0) {
    for (; from < filled; from += BATCH) {
      const at = <usize>from << 2;
      countBatch(plan, rises + at, pixels + at, min(BATCH, filled - from));
    }
  }
  store<i32>(plan + COUNTED, filled);
}

// @ts-ignore: decorator
@inline
function addCount(histogram: usize, cell: i32): void {
  const counter = histogram + (<usize>cell << 2);
  store<u32>(counter, load<u32>(counter) + 1);
}

/**
 * Two cells: floor((rise - from) / bin), by rounding (rise - from + 1/2) / bin - 1/2 with the sum of 1.5 * 2^52: the
 * fraction stays half a tick away from where rounding turns, far more than the error of the reciprocal.
 */
// @ts-ignore: decorator
@inline
function cellsOf(past: v128, perBin: v128): v128 {
  const quotient = f64x2.mul(f64x2.add(f64x2.convert_low_i32x4_u(past), f64x2.splat(0.5)), perBin);
  return f64x2.add(f64x2.sub(quotient, f64x2.splat(0.5)), f64x2.splat(ROUNDER));
}

function countHistogram(plan: usize, rise: usize, count: i32): void {
  const histogram = load<usize>(plan + HISTOGRAM);
  const from = v128.load32_splat(plan + FROM);
  const length = v128.load32_splat(plan + LENGTH);
  const outside = v128.load32_splat(plan + BINS);
  const bin = load<f64>(plan + BIN);
  const perBin = f64x2.splat(1 / bin);
  const lanes = i32x4(0, 1, 2, 3);
  for (let n = 0; n < count; n += 4) {
    const past = i32x4.sub(v128.load(rise + (<usize>n << 2)), from);
    const high = i8x16.shuffle(past, past, 8, 9, 10, 11, 12, 13, 14, 15, 8, 9, 10, 11, 12, 13, 14, 15);
    const cells = lows(cellsOf(past, perBin), cellsOf(high, perBin));
    const isIn = v128.and(i32x4.lt_u(past, length), i32x4.lt_s(lanes, i32x4.splat(count - n)));
    const chosen = v128.bitselect(cells, outside, isIn);
    addCount(histogram, i32x4.extract_lane(chosen, 0));
    addCount(histogram, i32x4.extract_lane(chosen, 1));
    addCount(histogram, i32x4.extract_lane(chosen, 2));
    addCount(histogram, i32x4.extract_lane(chosen, 3));
  }
}

/** Few pairs lie in a window: those near one are listed first, without a branch. */
function countBatch(plan: usize, rise: usize, pixel: usize, count: i32): void {
  const table = load<usize>(plan + TABLE);
  const bits = load<u32>(plan + TABLE_BITS);
  const chosen = load<usize>(plan + CHOSEN);
  let listed = 0;
  for (let n = 0; n < count; n++) {
    store<u16>(chosen + (<usize>listed << 1), <u16>n);
    listed += <i32>(load<u8>(table + <usize>(load<u32>(rise + (<usize>n << 2)) >> bits)) != 0);
  }
  const slot = load<i32>(plan + SLOT);
  const windows = load<i32>(plan + WINDOWS);
  for (let m = 0; m < listed; m++) {
    const n = <usize>load<u16>(chosen + (<usize>m << 1));
    const above = load<u32>(rise + (n << 2));
    const which = <i32>load<u8>(table + <usize>(above >> bits));
    const first = which == 255 ? 0 : which - 1;
    const stop = which == 255 ? windows : which;
    for (let w = first; w < stop; w++) {
      const window = plan + WINDOW + <usize>w * WINDOW_BYTES;
      if (above < load<u32>(window) || above > load<u32>(window, 4)) continue;
      const ab = load<u32>(pixel + (n << 2));
      addPair(load<usize>(window, 8), slot, <i32>(ab & 0xffff), <i32>(ab >> 16));
    }
  }
}

// @ts-ignore: decorator
@inline
function addOne(counters: usize, cell: i32): void {
  const at = counters + (<usize>cell << 3);
  store<f64>(at, load<f64>(at) + 1);
}

/** Per slice, maps per slice, and channel pairs, or where no matrix is kept difference and sum, which follow from it. */
function addPair(into: usize, slot: i32, a: i32, b: i32): void {
  const widthA = load<i32>(into + STORE_WIDTH_A);
  const heightA = load<i32>(into + STORE_HEIGHT_A);
  const widthB = load<i32>(into + STORE_WIDTH_B);
  const heightB = load<i32>(into + STORE_HEIGHT_B);
  const pixelsA = widthA * heightA;
  const xA = load<i32>(load<usize>(into + STORE_X_A) + (<usize>a << 2));
  const yA = load<i32>(load<usize>(into + STORE_Y_A) + (<usize>a << 2));
  const xB = load<i32>(load<usize>(into + STORE_X_B) + (<usize>b << 2));
  const yB = load<i32>(load<usize>(into + STORE_Y_B) + (<usize>b << 2));
  addOne(load<usize>(into + STORE_PAIRS), slot);
  addOne(load<usize>(into + STORE_JOINT_X), (slot * widthB + xB) * widthA + xA);
  addOne(load<usize>(into + STORE_JOINT_Y), (slot * heightB + yB) * heightA + yA);
  addOne(load<usize>(into + STORE_IMAGE_B), slot * widthB * heightB + b);
  addOne(load<usize>(into + STORE_IMAGE_A), slot * pixelsA + a);
  const matrix = load<usize>(into + STORE_MATRIX);
  if (matrix != 0) {
    addOne(matrix, b * pixelsA + a);
    return;
  }
  const width = widthA + widthB - 1;
  addOne(load<usize>(into + STORE_DIFFERENCE), (heightA - 1 + yB - yA) * width + widthA - 1 + xB - xA);
  addOne(load<usize>(into + STORE_SUM), (yA + yB) * width + xA + xB);
}

/** counts[(rise - from) >> bits] += 1 (u32) for rises of [from, from + span]. */
export function countBuckets(rise: usize, count: i32, from: u32, span: u32, bits: i32, counts: usize): void {
  for (let n = 0; n < count; n++) {
    const above = load<u32>(rise + (<usize>n << 2)) - from;
    if (above <= span) addCount(counts, <i32>(above >> bits));
  }
}

/**
 * Moves the same pairs, all of one slice, to their buckets: `next` holds the place of the next pair of each (u32), and is
 * brought up to date. A place has 8 bytes: offset in the bucket (16 bits), both pixels (16 each), slot.
 */
export function toBuckets(
  rise: usize, pixel: usize, count: i32, from: u32, span: u32, bits: i32, slot: i32, next: usize, into: usize,
): void {
  const mask = (<u32>1 << bits) - 1;
  const slotBits = <u64>slot << 48;
  for (let n = 0; n < count; n++) {
    const above = load<u32>(rise + (<usize>n << 2)) - from;
    if (above > span) continue;
    const place = next + (<usize>(above >> bits) << 2);
    const at = load<u32>(place);
    store<u32>(place, at + 1);
    store<u64>(
      into + (<usize>at << 3),
      <u64>(above & mask) | (<u64>load<u32>(pixel + (<usize>n << 2)) << 16) | slotBits,
    );
  }
}

/** The columns of so many places: offset, pixel A, pixel B (u16), slot (u8). Reads and writes up to 7 past the last. */
export function toColumns(from: usize, count: i32, offset: usize, pixelA: usize, pixelB: usize, slot: usize): void {
  for (let n = 0; n < count; n += 8) {
    const at = from + (<usize>n << 3);
    // Pairs of columns first, eight places in four registers.
    const a = turned(v128.load(at), v128.load(at, 16));
    const b = turned(v128.load(at, 32), v128.load(at, 48));
    const c = turnedHigh(v128.load(at), v128.load(at, 16));
    const d = turnedHigh(v128.load(at, 32), v128.load(at, 48));
    const column = <usize>n << 1;
    v128.store(offset + column, i64x2.shuffle(a, b, 0, 2));
    v128.store(pixelA + column, i64x2.shuffle(a, b, 1, 3));
    v128.store(pixelB + column, i64x2.shuffle(c, d, 0, 2));
    const slots = i64x2.shuffle(c, d, 1, 3);
    v128.store64_lane(slot + <usize>n, i8x16.narrow_i16x8_u(slots, slots), 0);
  }
}

/** Of four places the first 16 bits, then the second. */
// @ts-ignore: decorator
@inline
function turned(p: v128, q: v128): v128 {
  return i8x16.shuffle(p, q, 0, 1, 8, 9, 16, 17, 24, 25, 2, 3, 10, 11, 18, 19, 26, 27);
}

/** Of four places the third 16 bits, then the fourth. */
// @ts-ignore: decorator
@inline
function turnedHigh(p: v128, q: v128): v128 {
  return i8x16.shuffle(p, q, 4, 5, 12, 13, 20, 21, 28, 29, 6, 7, 14, 15, 22, 23, 30, 31);
}

/** counts[site] += 1 (doubles). */
export function countSites(site: usize, count: i32, counts: usize): void {
  for (let i = 0; i < count; i++) addOne(counts, load<i32>(site + (<usize>i << 2)));
}
