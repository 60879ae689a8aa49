/** Decimal text to whole ticks without passing through a rounded double. */

/** (lead * 10^restDigits + rest) * 10^exponent, negated where said. Both parts are whole and below 10^15. */
export interface Decimal {
  negative: boolean;
  lead: number;
  rest: number;
  restDigits: number;
  exponent: number;
}

export const createDecimal = (): Decimal => ({
  negative: false,
  lead: 0,
  rest: 0,
  restDigits: 0,
  exponent: 0,
});

/** Digits of one part: below 10^15 every whole number and ten times it is exact in a double. */
const partDigits = 15;
/** Larger exponents never give a time, and would only make long integers. */
const largestExponent = 400;

/**
 * Reads [from, to) of ASCII bytes as `[+-]digits[mark digits][e[+-]digits]` into `into`. False when it is anything
 * else, or holds more than 30 digits that matter (trailing zeros of a fraction do not).
 */
export function scanDecimal(
  bytes: Uint8Array,
  from: number,
  to: number,
  mark: number,
  into: Decimal,
): boolean {
  let at = from;
  into.negative = bytes[at] === 45;
  if (at < to && (bytes[at] === 45 || bytes[at] === 43)) at += 1;
  let lead = 0;
  let leadDigits = 0;
  let rest = 0;
  let restDigits = 0;
  let zeros = 0;
  let exponent = 0;
  let digits = 0;
  let inFraction = false;
  for (; at < to; at += 1) {
    const byte = bytes[at]!;
    const digit = byte - 48;
    if (digit >= 0 && digit <= 9) {
      digits += 1;
      if (inFraction) exponent -= 1;
      if (digit === 0) {
        // Kept back until a digit follows that gives them weight; leading zeros never get any.
        if (lead > 0) zeros += 1;
        continue;
      }
      for (; zeros >= 0; zeros -= 1) {
        const next = zeros === 0 ? digit : 0;
        if (leadDigits < partDigits) {
          lead = lead * 10 + next;
          leadDigits += 1;
        } else if (restDigits < partDigits) {
          rest = rest * 10 + next;
          restDigits += 1;
        } else return false;
      }
      zeros = 0;
    } else if (byte === mark && !inFraction) inFraction = true;
    else break;
  }
  if (digits === 0) return false;
  if (at < to) {
    const power = scanExponent(bytes, at, to);
    if (Number.isNaN(power)) return false;
    exponent += power;
  }
  into.lead = lead;
  into.rest = rest;
  into.restDigits = restDigits;
  into.exponent = lead === 0 ? 0 : exponent + zeros;
  return true;
}

function scanExponent(bytes: Uint8Array, from: number, to: number): number {
  if (bytes[from] !== 101 && bytes[from] !== 69) return Number.NaN;
  let at = from + 1;
  const negative = bytes[at] === 45;
  if (bytes[at] === 45 || bytes[at] === 43) at += 1;
  if (at >= to) return Number.NaN;
  let power = 0;
  for (; at < to; at += 1) {
    const digit = bytes[at]! - 48;
    if (!(digit >= 0 && digit <= 9)) return Number.NaN;
    power = Math.min(largestExponent, power * 10 + digit);
  }
  return negative ? -power : power;
}

/**
 * `whole / parts` ticks to one unit of the text, as the decimal text of the two lengths says (15.625 is 15625/1000), and
 * what it comes to per power of ten.
 */
export interface TickScale {
  numerator: bigint;
  denominator: bigint;
  /** Ticks to the unit when they are whole and below 2^50, so that the part of a unit is near to it; else 0. */
  ticksPerUnit: number;
  /** 10^(e - tableOffset) units in lowest terms; NaN where either passes 2^53. */
  tableNumerator: Float64Array;
  tableDenominator: Float64Array;
}

export const tableOffset = 40;

export function planScale(unitFs: number, tickFs: number): TickScale {
  const [numerator, denominator] = reduce(...divide(decimalOf(unitFs), decimalOf(tickFs)));
  const tableNumerator = new Float64Array(2 * tableOffset + 1);
  const tableDenominator = new Float64Array(2 * tableOffset + 1);
  for (let e = -tableOffset; e <= tableOffset; e += 1) {
    const [n, d] = reduce(
      e > 0 ? numerator * 10n ** BigInt(e) : numerator,
      e < 0 ? denominator * 10n ** BigInt(-e) : denominator,
    );
    tableNumerator[e + tableOffset] = safe(n);
    tableDenominator[e + tableOffset] = safe(d);
  }
  const isWhole = denominator === 1n && numerator < 2n ** 50n;
  return {
    numerator,
    denominator,
    ticksPerUnit: isWhole ? Number(numerator) : 0,
    tableNumerator,
    tableDenominator,
  };
}

const safe = (value: bigint): number => (value < 2n ** 53n ? Number(value) : Number.NaN);

/** A positive double as digits times a power of ten: those that its shortest text has. */
function decimalOf(value: number): { digits: bigint; exponent: number } {
  const [mantissa, power] = value.toExponential().split('e') as [string, string];
  const [whole, fraction = ''] = mantissa.split('.') as [string, string?];
  return { digits: BigInt(whole + fraction), exponent: Number(power) - fraction.length };
}

function divide(
  a: { digits: bigint; exponent: number },
  b: { digits: bigint; exponent: number },
): [bigint, bigint] {
  const shift = a.exponent - b.exponent;
  const ten = 10n ** BigInt(Math.abs(shift));
  return shift >= 0 ? [a.digits * ten, b.digits] : [a.digits, b.digits * ten];
}

function reduce(numerator: bigint, denominator: bigint): [bigint, bigint] {
  let [a, b] = [numerator, denominator];
  while (b !== 0n) [a, b] = [b, a % b];
  return [numerator / a, denominator / a];
}

const exactLimit = 2 ** 53;

/**
 * Whole ticks, halves upwards (so that a shift by whole ticks never changes the rounding), when numbers of 53 bits get
 * there; NaN when they do not.
 */
export function ticksOfDecimal(decimal: Decimal, scale: TickScale): number {
  const at = decimal.exponent + tableOffset;
  if (decimal.restDigits > 0 || at < 0 || at > 2 * tableOffset) return Number.NaN;
  const double = 2 * decimal.lead * scale.tableNumerator[at]!;
  const denominator = scale.tableDenominator[at]!;
  // A quotient of two such numbers that is not whole lies further from the next whole one than it is rounded.
  if (!(double + 2 * denominator < exactLimit)) return Number.NaN;
  return Math.floor((denominator + (decimal.negative ? -double : double)) / (2 * denominator));
}

/** The same by integers of any length. */
export function exactTicksOfDecimal(decimal: Decimal, scale: TickScale): bigint {
  const { lead, rest, restDigits, exponent } = decimal;
  const digits = BigInt(lead) * 10n ** BigInt(restDigits) + BigInt(rest);
  const ten = 10n ** BigInt(Math.abs(exponent));
  const numerator = (decimal.negative ? -digits : digits) * scale.numerator * (exponent > 0 ? ten : 1n);
  const denominator = scale.denominator * (exponent < 0 ? ten : 1n);
  return floorDivide(2n * numerator + denominator, 2n * denominator);
}

function floorDivide(a: bigint, b: bigint): bigint {
  const quotient = a / b;
  return a % b < 0n ? quotient - 1n : quotient;
}
