// Decoding of fixed-width records of 1 to 8 bytes, time fields of at most 52 bits, channels of at most 16. Twin of
// workers/formats/records/decode-fast.ts; ../tag-decode.ts prepares the rules. Times become doubles by setting the
// exponent of 2^52 above their bits and taking 2^52 off: exact, and two instructions for two records.
//
// Eight records at a time while none of them is a marker, skipped or a wrap; at one that is, the records before it are
// kept, it is dealt with alone, and the next eight begin right after it.

/** Byte offsets of the rules (see ../tag-decode.ts). */
const TIME_SHIFT: usize = 0;
const TIME_MASK: usize = 8;
const CHANNEL_SHIFT: usize = 16;
const CHANNEL_MASK: usize = 24;
const ADVANCE: usize = 32;
const MODE: usize = 40;
const TESTS: usize = 44;
const EPOCH: usize = 48;
const PREVIOUS: usize = 56;
const NEXT: usize = 64;
const KEPT: usize = 68;
/** Mask and value of each test, the rollover marker first when there is one. */
const TEST: usize = 80;

/** Modes; 0 when nothing rolls over. */
const WRAP: i32 = 1;
const MARKER: i32 = 2;
const COUNTED: i32 = 3;

const EXPONENT: i64 = 0x4330000000000000;
const TWO_52: f64 = 4503599627370496;

// @ts-ignore: decorator
@inline
function wordAt(source: usize, i: i32, bytes: i32, isBig: i32): u64 {
  const word = load<u64>(source + <usize>i * bytes);
  return isBig != 0 ? bswap(word) >> (64 - 8 * bytes) : word & (<u64>-1 >> (64 - 8 * bytes));
}

// @ts-ignore: decorator
@inline
function rawOf(rules: usize, word: u64): f64 {
  return <f64>((word >> load<u64>(rules + TIME_SHIFT)) & load<u64>(rules + TIME_MASK));
}

/** Index of the first test that holds, -1 when none does. */
function testOf(rules: usize, word: u64): i32 {
  const tests = load<i32>(rules + TESTS);
  for (let k = 0; k < tests; k++) {
    const at = rules + TEST + (<usize>k << 4);
    if ((word & load<u64>(at)) == load<u64>(at, 8)) return k;
  }
  return -1;
}

/** Adds a rollover; false, with nothing changed, when the epoch would pass 2^52. */
function advance(rules: usize, mode: i32, word: u64): bool {
  const step = load<f64>(rules + ADVANCE) * (mode == COUNTED ? rawOf(rules, word) : 1);
  const epoch = load<f64>(rules + EPOCH) + step;
  if (!(epoch <= TWO_52)) return false;
  store<f64>(rules + EPOCH, epoch);
  return true;
}

/**
 * One record at a time from `i` to `end`: any length, and what the eights leave over. Returns the tags there are then;
 * the record it came to is left at NEXT (before `end` when the epoch is full).
 */
function decodeSingly(
  rules: usize, source: usize, bytes: i32, isBig: i32, i: i32, end: i32, time: usize, channel: usize, n: i32,
): i32 {
  const mode = load<i32>(rules + MODE);
  const half = load<f64>(rules + ADVANCE) / 2;
  for (; i < end; i++) {
    const word = wordAt(source, i, bytes, isBig);
    const test = testOf(rules, word);
    if (test == 0 && mode >= MARKER) {
      if (!advance(rules, mode, word)) break;
      continue;
    }
    if (test >= 0) continue;
    const raw = rawOf(rules, word);
    if (mode == WRAP) {
      if (load<f64>(rules + PREVIOUS) - raw > half && !advance(rules, mode, word)) break;
      store<f64>(rules + PREVIOUS, raw);
    }
    store<f64>(time + (<usize>n << 3), raw + load<f64>(rules + EPOCH));
    store<u16>(
      channel + (<usize>n << 1),
      <u16>((word >> load<u64>(rules + CHANNEL_SHIFT)) & load<u64>(rules + CHANNEL_MASK)),
    );
    n++;
  }
  store<i32>(rules + NEXT, i);
  return n;
}

// @ts-ignore: decorator
@inline
function pair(at: usize, isBig: bool): v128 {
  const words = v128.load(at);
  return isBig ? i8x16.shuffle(words, words, 7, 6, 5, 4, 3, 2, 1, 0, 15, 14, 13, 12, 11, 10, 9, 8) : words;
}

// @ts-ignore: decorator
@inline
function quad(at: usize, isBig: bool): v128 {
  const words = v128.load(at);
  return isBig ? i8x16.shuffle(words, words, 3, 2, 1, 0, 7, 6, 5, 4, 11, 10, 9, 8, 15, 14, 13, 12) : words;
}

/** Lanes 0 and 2 of both: the low words of four 64-bit lanes. */
// @ts-ignore: decorator
@inline
function lows(a: v128, b: v128): v128 {
  return i8x16.shuffle(a, b, 0, 1, 2, 3, 8, 9, 10, 11, 16, 17, 18, 19, 24, 25, 26, 27);
}

/** What precedes each of the two: the last of the pair before, and the first. */
// @ts-ignore: decorator
@inline
function before(last: v128, now: v128): v128 {
  return i8x16.shuffle(last, now, 8, 9, 10, 11, 12, 13, 14, 15, 16, 17, 18, 19, 20, 21, 22, 23);
}

/** Lanes 1 and 3 of both: the high words of four 64-bit lanes. */
// @ts-ignore: decorator
@inline
function highs(a: v128, b: v128): v128 {
  return i8x16.shuffle(a, b, 4, 5, 6, 7, 12, 13, 14, 15, 20, 21, 22, 23, 28, 29, 30, 31);
}

/** Ticks below 2^52 plus the epoch: (2^52 + ticks) - (2^52 - epoch), exact because the sum is below 2^53. */
// @ts-ignore: decorator
@inline
function toTimes(ticks: v128, base: v128): v128 {
  return f64x2.sub(v128.or(ticks, i64x2.splat(EXPONENT)), base);
}

/** Where the first record is that is not a plain tag, 8 when there is none. */
// @ts-ignore: decorator
@inline
function firstOdd(a: v128, b: v128): i32 {
  return ctz(i16x8.bitmask(i16x8.narrow_i32x4_s(a, b)) | 0x100);
}

/** Deals with the odd record at `i` alone; false when the epoch is full. The tags there are then are left at KEPT. */
// @ts-ignore: decorator
@inline
function passOdd(
  rules: usize, source: usize, bytes: i32, isBig: bool, i: i32, time: usize, channel: usize, n: i32,
): bool {
  const mode = load<i32>(rules + MODE);
  if (mode >= MARKER) {
    const word = wordAt(source, i, bytes, isBig ? 1 : 0);
    store<i32>(rules + KEPT, n);
    store<i32>(rules + NEXT, i);
    return (word & load<u64>(rules + TEST)) == load<u64>(rules + TEST, 8) ? advance(rules, mode, word) : true;
  }
  store<i32>(rules + KEPT, decodeSingly(rules, source, bytes, isBig ? 1 : 0, i, i + 1, time, channel, n));
  return load<i32>(rules + NEXT) > i;
}

/**
 * Records of eight bytes. With `isHigh` the channel and everything tested lie in the upper four, so that half as many
 * words are looked at.
 */
// @ts-ignore: decorator
@inline
function decodeWide(
  rules: usize, source: usize, isBig: bool, isHigh: bool, end: i32, time: usize, channel: usize,
): i32 {
  const timeShift = load<i32>(rules + TIME_SHIFT);
  const timeMask = i64x2.splat(load<i64>(rules + TIME_MASK));
  const channelShift = load<i32>(rules + CHANNEL_SHIFT) - (isHigh ? 32 : 0);
  const channelMask = isHigh
    ? i32x4.splat(load<i32>(rules + CHANNEL_MASK))
    : i64x2.splat(load<i64>(rules + CHANNEL_MASK));
  const mode = load<i32>(rules + MODE);
  const tests = load<i32>(rules + TESTS);
  const half = f64x2.splat(load<f64>(rules + ADVANCE) / 2);
  let epoch = load<f64>(rules + EPOCH);
  let base = f64x2.splat(TWO_52 - epoch);
  let previous = f64x2.splat(load<f64>(rules + PREVIOUS) + epoch);
  let n = 0;
  let i = 0;
  while (i + 8 <= end) {
    const at = source + (<usize>i << 3);
    const a = pair(at, isBig);
    const b = pair(at + 16, isBig);
    const c = pair(at + 32, isBig);
    const d = pair(at + 48, isBig);
    const ta = toTimes(v128.and(i64x2.shr_u(a, timeShift), timeMask), base);
    const tb = toTimes(v128.and(i64x2.shr_u(b, timeShift), timeMask), base);
    const tc = toTimes(v128.and(i64x2.shr_u(c, timeShift), timeMask), base);
    const td = toTimes(v128.and(i64x2.shr_u(d, timeShift), timeMask), base);
    const out = time + (<usize>n << 3);
    v128.store(out, ta);
    v128.store(out, tb, 16);
    v128.store(out, tc, 32);
    v128.store(out, td, 48);
    let odd = i32x4.splat(0);
    let oddLater = i32x4.splat(0);
    if (isHigh) {
      const high = highs(a, b);
      const highLater = highs(c, d);
      v128.store(
        channel + (<usize>n << 1),
        i16x8.narrow_i32x4_u(
          v128.and(i32x4.shr_u(high, channelShift), channelMask),
          v128.and(i32x4.shr_u(highLater, channelShift), channelMask),
        ),
      );
      for (let k = 0; k < tests; k++) {
        const test = rules + TEST + (<usize>k << 4);
        const mask = v128.load32_splat(test, 4);
        const value = v128.load32_splat(test, 12);
        odd = v128.or(odd, i32x4.eq(v128.and(high, mask), value));
        oddLater = v128.or(oddLater, i32x4.eq(v128.and(highLater, mask), value));
      }
    } else {
      v128.store(
        channel + (<usize>n << 1),
        i16x8.narrow_i32x4_u(
          lows(
            v128.and(i64x2.shr_u(a, channelShift), channelMask),
            v128.and(i64x2.shr_u(b, channelShift), channelMask),
          ),
          lows(
            v128.and(i64x2.shr_u(c, channelShift), channelMask),
            v128.and(i64x2.shr_u(d, channelShift), channelMask),
          ),
        ),
      );
      for (let k = 0; k < tests; k++) {
        const test = rules + TEST + (<usize>k << 4);
        const mask = v128.load64_splat(test);
        const value = v128.load64_splat(test, 8);
        odd = v128.or(
          odd,
          lows(i64x2.eq(v128.and(a, mask), value), i64x2.eq(v128.and(b, mask), value)),
        );
        oddLater = v128.or(
          oddLater,
          lows(i64x2.eq(v128.and(c, mask), value), i64x2.eq(v128.and(d, mask), value)),
        );
      }
    }
    if (mode == WRAP) {
      odd = v128.or(
        odd,
        lows(
          f64x2.gt(f64x2.sub(before(previous, ta), ta), half),
          f64x2.gt(f64x2.sub(before(ta, tb), tb), half),
        ),
      );
      oddLater = v128.or(
        oddLater,
        lows(
          f64x2.gt(f64x2.sub(before(tb, tc), tc), half),
          f64x2.gt(f64x2.sub(before(tc, td), td), half),
        ),
      );
    }
    if (!v128.any_true(v128.or(odd, oddLater))) {
      previous = td;
      n += 8;
      i += 8;
      continue;
    }
    const plain = firstOdd(odd, oddLater);
    const last = plain > 0 ? load<f64>(out + (<usize>(plain - 1) << 3)) : f64x2.extract_lane(previous, 1);
    store<f64>(rules + PREVIOUS, last - epoch);
    n += plain;
    i += plain;
    if (!passOdd(rules, source, 8, isBig, i, time, channel, n)) return load<i32>(rules + KEPT);
    n = load<i32>(rules + KEPT);
    i += 1;
    epoch = load<f64>(rules + EPOCH);
    base = f64x2.splat(TWO_52 - epoch);
    previous = f64x2.splat(load<f64>(rules + PREVIOUS) + epoch);
  }
  store<f64>(rules + PREVIOUS, f64x2.extract_lane(previous, 1) - epoch);
  return decodeSingly(rules, source, 8, isBig ? 1 : 0, i, end, time, channel, n);
}

/** Records of four bytes. */
// @ts-ignore: decorator
@inline
function decodeNarrow(rules: usize, source: usize, isBig: bool, end: i32, time: usize, channel: usize): i32 {
  const timeShift = load<i32>(rules + TIME_SHIFT);
  const timeMask = i32x4.splat(load<i32>(rules + TIME_MASK));
  const channelShift = load<i32>(rules + CHANNEL_SHIFT);
  const channelMask = i32x4.splat(load<i32>(rules + CHANNEL_MASK));
  const mode = load<i32>(rules + MODE);
  const tests = load<i32>(rules + TESTS);
  const half = f64x2.splat(load<f64>(rules + ADVANCE) / 2);
  const firstMask = v128.load32_splat(rules + TEST);
  const firstValue = v128.load32_splat(rules + TEST, 8);
  let epoch = load<f64>(rules + EPOCH);
  let base = f64x2.splat(TWO_52 - epoch);
  let previous = f64x2.splat(load<f64>(rules + PREVIOUS) + epoch);
  let n = 0;
  let i = 0;
  while (i + 8 <= end) {
    const at = source + (<usize>i << 2);
    const a = quad(at, isBig);
    const b = quad(at + 16, isBig);
    const ticksA = v128.and(i32x4.shr_u(a, timeShift), timeMask);
    const ticksB = v128.and(i32x4.shr_u(b, timeShift), timeMask);
    const t0 = toTimes(i64x2.extend_low_i32x4_u(ticksA), base);
    const t1 = toTimes(i64x2.extend_high_i32x4_u(ticksA), base);
    const t2 = toTimes(i64x2.extend_low_i32x4_u(ticksB), base);
    const t3 = toTimes(i64x2.extend_high_i32x4_u(ticksB), base);
    const out = time + (<usize>n << 3);
    v128.store(out, t0);
    v128.store(out, t1, 16);
    v128.store(out, t2, 32);
    v128.store(out, t3, 48);
    v128.store(
      channel + (<usize>n << 1),
      i16x8.narrow_i32x4_u(
        v128.and(i32x4.shr_u(a, channelShift), channelMask),
        v128.and(i32x4.shr_u(b, channelShift), channelMask),
      ),
    );
    // Without any test the first is one that nothing passes: mask 0, value 1.
    let oddA = i32x4.eq(v128.and(a, firstMask), firstValue);
    let oddB = i32x4.eq(v128.and(b, firstMask), firstValue);
    for (let k = 1; k < tests; k++) {
      const test = rules + TEST + (<usize>k << 4);
      const mask = v128.load32_splat(test);
      const value = v128.load32_splat(test, 8);
      oddA = v128.or(oddA, i32x4.eq(v128.and(a, mask), value));
      oddB = v128.or(oddB, i32x4.eq(v128.and(b, mask), value));
    }
    if (mode == WRAP) {
      const falls0 = f64x2.gt(f64x2.sub(before(previous, t0), t0), half);
      const falls1 = f64x2.gt(f64x2.sub(before(t0, t1), t1), half);
      const falls2 = f64x2.gt(f64x2.sub(before(t1, t2), t2), half);
      const falls3 = f64x2.gt(f64x2.sub(before(t2, t3), t3), half);
      oddA = v128.or(oddA, lows(falls0, falls1));
      oddB = v128.or(oddB, lows(falls2, falls3));
    }
    if (!v128.any_true(v128.or(oddA, oddB))) {
      previous = t3;
      n += 8;
      i += 8;
      continue;
    }
    const plain = firstOdd(oddA, oddB);
    const last = plain > 0 ? load<f64>(out + (<usize>(plain - 1) << 3)) : f64x2.extract_lane(previous, 1);
    store<f64>(rules + PREVIOUS, last - epoch);
    n += plain;
    i += plain;
    if (!passOdd(rules, source, 4, isBig, i, time, channel, n)) return load<i32>(rules + KEPT);
    n = load<i32>(rules + KEPT);
    i += 1;
    epoch = load<f64>(rules + EPOCH);
    base = f64x2.splat(TWO_52 - epoch);
    previous = f64x2.splat(load<f64>(rules + PREVIOUS) + epoch);
  }
  store<f64>(rules + PREVIOUS, f64x2.extract_lane(previous, 1) - epoch);
  return decodeSingly(rules, source, 4, isBig ? 1 : 0, i, end, time, channel, n);
}

// One function a kind of record: the engine optimises each in a short time, and only the one that is used. All decode
// `records` records into columns of as much room and return the tags written; the record they stopped before is left at
// NEXT. Up to 8 bytes after the last record are read and not used.

/** Records of `bytes` bytes, 1 to 8, one at a time. */
export function decodeAny(
  rules: usize, source: usize, records: i32, time: usize, channel: usize, bytes: i32, isBig: i32,
): i32 {
  return decodeSingly(rules, source, bytes, isBig, 0, records, time, channel, 0);
}

export function decodeEight(rules: usize, source: usize, records: i32, time: usize, channel: usize): i32 {
  return decodeWide(rules, source, false, false, records, time, channel);
}

/** Eight bytes, the channel and everything tested in the upper four. */
export function decodeEightHigh(rules: usize, source: usize, records: i32, time: usize, channel: usize): i32 {
  return decodeWide(rules, source, false, true, records, time, channel);
}

export function decodeEightBig(rules: usize, source: usize, records: i32, time: usize, channel: usize): i32 {
  return decodeWide(rules, source, true, false, records, time, channel);
}

export function decodeFour(rules: usize, source: usize, records: i32, time: usize, channel: usize): i32 {
  return decodeNarrow(rules, source, false, records, time, channel);
}

export function decodeFourBig(rules: usize, source: usize, records: i32, time: usize, channel: usize): i32 {
  return decodeNarrow(rules, source, true, records, time, channel);
}
