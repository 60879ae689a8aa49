// Taking, ordering and thinning tags. Twins of the functions of the same names in ../tag-take.ts and ../tag-sort.ts.

// @ts-ignore: decorator
@inline
function takeOne(entry: usize, delta: f64, time: usize, site: usize, at: i32): i32 {
  const s = load<i32>(entry, 8);
  store<f64>(time + (<usize>at << 3), delta + load<f64>(entry));
  store<i32>(site + (<usize>at << 2), s);
  const counter = load<usize>(entry, 12);
  store<u32>(counter, load<u32>(counter) + 1);
  return at + 1 - (<u32>s >>> 31);
}

/**
 * Keeps the tags whose channel has a site, with the channel's delay added; counts them per site. `table` has 16 bytes a
 * channel: delay (f64), site or -1 (i32), address of its counter (u32), where channels without a site share one, so
 * that nothing branches. Returns how many were kept; the columns need room for all.
 */
export function takeTags(delta: usize, channel: usize, n: i32, table: usize, time: usize, site: usize): i32 {
  let at = 0;
  let i = 0;
  for (; i + 4 <= n; i += 4) {
    const from = delta + (<usize>i << 3);
    const channels = load<u64>(channel + (<usize>i << 1));
    at = takeOne(table + <usize>((channels << 4) & 0xffff0), load<f64>(from), time, site, at);
    at = takeOne(table + <usize>((channels >> 12) & 0xffff0), load<f64>(from, 8), time, site, at);
    at = takeOne(table + <usize>((channels >> 28) & 0xffff0), load<f64>(from, 16), time, site, at);
    at = takeOne(table + <usize>((channels >> 44) & 0xffff0), load<f64>(from, 24), time, site, at);
  }
  for (; i < n; i++) {
    const entry = table + (<usize>load<u16>(channel + (<usize>i << 1)) << 4);
    at = takeOne(entry, load<f64>(delta + (<usize>i << 3)), time, site, at);
  }
  return at;
}

const PIECE: i32 = 512;

/**
 * What order times come in, given the latest one before them: leaves at `out` the latest now (f64), the number that
 * came more than `horizon` after a later one (f64) and whether they are sorted (1 or 0, f64).
 */
export function orderOf(time: usize, n: i32, latest: f64, horizon: f64, out: usize): void {
  let late: f64 = 0;
  let isSorted = true;
  for (let start = 0; start < n; start += PIECE) {
    const stop = min(start + PIECE, n);
    let least = f64x2.splat(Infinity);
    let most = f64x2.splat(-Infinity);
    let falls = i64x2.splat(0);
    let i = start;
    for (; i + 2 < stop; i += 2) {
      const at = time + (<usize>i << 3);
      const here = v128.load(at);
      falls = v128.or(falls, f64x2.lt(v128.load(at, 8), here));
      least = f64x2.pmin(least, here);
      most = f64x2.pmax(most, here);
    }
    let low = min(f64x2.extract_lane(least, 0), f64x2.extract_lane(least, 1));
    let high = max(f64x2.extract_lane(most, 0), f64x2.extract_lane(most, 1));
    for (; i < stop; i++) {
      const t = load<f64>(time + (<usize>i << 3));
      if (i + 1 < n && load<f64>(time + (<usize>i << 3), 8) < t) isSorted = false;
      low = min(low, t);
      high = max(high, t);
    }
    if (v128.any_true(falls)) isSorted = false;
    if (max(latest, high) - low <= horizon) {
      latest = max(latest, high);
      continue;
    }
    for (i = start; i < stop; i++) {
      const t = load<f64>(time + (<usize>i << 3));
      if (t > latest) latest = t;
      else if (latest - t > horizon) late += 1;
    }
  }
  store<f64>(out, latest);
  store<f64>(out, late, 8);
  store<f64>(out, isSorted ? 1 : 0, 16);
}

export function isSorted(time: usize, n: i32): bool {
  let i = 0;
  let falls = i64x2.splat(0);
  for (; i + 8 < n; i += 8) {
    const at = time + (<usize>i << 3);
    falls = f64x2.lt(v128.load(at, 8), v128.load(at));
    falls = v128.or(falls, f64x2.lt(v128.load(at, 24), v128.load(at, 16)));
    falls = v128.or(falls, f64x2.lt(v128.load(at, 40), v128.load(at, 32)));
    falls = v128.or(falls, f64x2.lt(v128.load(at, 56), v128.load(at, 48)));
    if (v128.any_true(falls)) return false;
  }
  for (; i + 1 < n; i++) {
    if (load<f64>(time + (<usize>i << 3), 8) < load<f64>(time + (<usize>i << 3))) return false;
  }
  return true;
}

const RUN: i32 = 32;

/** Sorts by time, tags of one time in the order they came: short runs by insertion, then merges where runs overlap. */
export function sortTags(time: usize, site: usize, n: i32, scratchTime: usize, scratchSite: usize): void {
  if (isSorted(time, n)) return;
  for (let run = 0; run < n; run += RUN) sortRun(time, site, run, min(run + RUN, n));
  for (let width = RUN; width < n; width *= 2) {
    for (let low = 0; low + width < n; low += 2 * width) {
      mergeRuns(time, site, low, low + width, min(low + 2 * width, n), scratchTime, scratchSite);
    }
  }
}

function sortRun(time: usize, site: usize, start: i32, stop: i32): void {
  for (let i = start + 1; i < stop; i++) {
    const t = load<f64>(time + (<usize>i << 3));
    if (load<f64>(time + (<usize>(i - 1) << 3)) <= t) continue;
    const s = load<i32>(site + (<usize>i << 2));
    let j = i - 1;
    for (; j >= start; j--) {
      const other = load<f64>(time + (<usize>j << 3));
      if (other <= t) break;
      store<f64>(time + (<usize>j << 3), other, 8);
      store<i32>(site + (<usize>j << 2), load<i32>(site + (<usize>j << 2)), 4);
    }
    store<f64>(time + (<usize>j << 3), t, 8);
    store<i32>(site + (<usize>j << 2), s, 4);
  }
}

/** Merges sorted [low, middle) and [middle, high); `scratch` has room for the overlapping part of the left run. */
function mergeRuns(
  time: usize, site: usize, low: i32, middle: i32, high: i32, scratchTime: usize, scratchSite: usize,
): void {
  if (load<f64>(time + (<usize>(middle - 1) << 3)) <= load<f64>(time + (<usize>middle << 3))) return;
  const start = firstAbove(time, low, middle, load<f64>(time + (<usize>middle << 3)));
  const stop = firstAtLeast(time, middle, high, load<f64>(time + (<usize>(middle - 1) << 3)));
  const left = middle - start;
  memory.copy(scratchTime, time + (<usize>start << 3), <usize>left << 3);
  memory.copy(scratchSite, site + (<usize>start << 2), <usize>left << 2);
  let i = 0;
  let j = middle;
  let at = start;
  while (i < left && j < stop) {
    const t = load<f64>(scratchTime + (<usize>i << 3));
    const u = load<f64>(time + (<usize>j << 3));
    const isLeft = <i32>(t <= u);
    // Which run is next is a matter of chance: chosen by a mask.
    const mask = <usize>-isLeft;
    const fromTime = time + (<usize>j << 3);
    const fromSite = site + (<usize>j << 2);
    const timeFrom = fromTime ^ ((fromTime ^ (scratchTime + (<usize>i << 3))) & mask);
    const siteFrom = fromSite ^ ((fromSite ^ (scratchSite + (<usize>i << 2))) & mask);
    store<f64>(time + (<usize>at << 3), load<f64>(timeFrom));
    store<i32>(site + (<usize>at << 2), load<i32>(siteFrom));
    i += isLeft;
    j += 1 - isLeft;
    at++;
  }
  memory.copy(time + (<usize>at << 3), scratchTime + (<usize>i << 3), <usize>(left - i) << 3);
  memory.copy(site + (<usize>at << 2), scratchSite + (<usize>i << 2), <usize>(left - i) << 2);
}

function firstAtLeast(time: usize, start: i32, stop: i32, t: f64): i32 {
  while (start < stop) {
    const middle = (start + stop) >>> 1;
    if (load<f64>(time + (<usize>middle << 3)) < t) start = middle + 1;
    else stop = middle;
  }
  return start;
}

function firstAbove(time: usize, start: i32, stop: i32, t: f64): i32 {
  while (start < stop) {
    const middle = (start + stop) >>> 1;
    if (load<f64>(time + (<usize>middle << 3)) <= t) start = middle + 1;
    else stop = middle;
  }
  return start;
}

/** How many of the sites are below `sitesA`. */
export function countBelow(site: usize, n: i32, sitesA: i32): i32 {
  const limit = i32x4.splat(sitesA);
  let below = i32x4.splat(0);
  let i = 0;
  for (; i + 4 <= n; i += 4) {
    below = i32x4.sub(below, i32x4.lt_s(v128.load(site + (<usize>i << 2)), limit));
  }
  let total =
    i32x4.extract_lane(below, 0) + i32x4.extract_lane(below, 1) + i32x4.extract_lane(below, 2) + i32x4.extract_lane(below, 3);
  for (; i < n; i++) total += <i32>(load<i32>(site + (<usize>i << 2)) < sitesA);
  return total;
}

/** Drops, in place, sorted tags closer than `deadTick` to the last kept one of their site. Returns how many stay. */
export function dropDead(time: usize, site: usize, n: i32, deadTick: f64, lastOfSite: usize): i32 {
  let kept = 0;
  for (let i = 0; i < n; i++) {
    const t = load<f64>(time + (<usize>i << 3));
    const s = load<i32>(site + (<usize>i << 2));
    const last = lastOfSite + (<usize>s << 3);
    const before = load<f64>(last);
    const lives = <i32>(t - before >= deadTick);
    store<f64>(time + (<usize>kept << 3), t);
    store<i32>(site + (<usize>kept << 2), s);
    store<f64>(last, lives ? t : before);
    kept += lives;
  }
  return kept;
}
