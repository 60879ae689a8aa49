import { Problem } from '../../../shared/errors/problem';
import { createDecimal, type Decimal, exactTicksOfDecimal, scanDecimal, ticksOfDecimal } from './decimal';
import { farthestDelta, lowUnit, type TextBase, type TextSink } from './parse-fast';
import type { TextPlan } from './plan';

const QUOTE = 34;
const HASH = 35;
/** 64-bit ticks. */
const farthestTick = 2n ** 63n;

export interface LinePlace {
  name: string;
  /** As an editor counts, from 1. */
  line: number;
}

/** Bytes [from, to) of the fields wanted, without blanks and quotes around them; -1 where the line ends before them. */
interface Fields {
  timeFrom: number;
  timeTo: number;
  channelFrom: number;
  channelTo: number;
  columns: number;
}

const fields: Fields = { timeFrom: -1, timeTo: -1, channelFrom: -1, channelTo: -1, columns: 0 };
const decimal: Decimal = createDecimal();

/**
 * Reads one line with care, whatever it holds: a tag, or nothing on a blank line and on one that begins with #. Answers
 * false, with nothing taken, when the tag lies too far from the base. Throws `wrong-type` naming line and column.
 */
export function parseLine(
  bytes: Uint8Array,
  from: number,
  to: number,
  plan: TextPlan,
  base: TextBase,
  sink: TextSink,
  place: LinePlace,
): boolean {
  if (!isTagLine(bytes, from, to)) {
    sink.lines += 1;
    return true;
  }
  findFields(bytes, from, to, plan, place);
  readTime(bytes, plan, place);
  let delta = ticksOfDecimal(decimal, plan.scale) - base.tickNumber;
  if (!(delta > -farthestDelta && delta < farthestDelta)) {
    const exact = exactTicks(bytes, plan, place) - base.tick;
    if (exact >= farthestDelta || exact <= -farthestDelta) return false;
    delta = Number(exact);
  }
  sink.deltaTick[sink.count] = delta;
  sink.channel[sink.count] = readChannel(bytes, plan, place);
  sink.count += 1;
  sink.lines += 1;
  return true;
}

/** A base for the tag of the line, null where it holds none. Throws like `parseLine`. */
export function baseOfLine(
  bytes: Uint8Array,
  from: number,
  to: number,
  plan: TextPlan,
  place: LinePlace,
): TextBase | null {
  if (!isTagLine(bytes, from, to)) return null;
  findFields(bytes, from, to, plan, place);
  readTime(bytes, plan, place);
  const ticks = exactTicks(bytes, plan, place);
  const { ticksPerUnit } = plan.scale;
  // Where a unit is no whole number of ticks, only the careful way is gone, and it counts in ticks alone.
  if (ticksPerUnit === 0) return baseAt(ticks, 0n);
  const per = BigInt(ticksPerUnit);
  const units = ticks >= 0n ? ticks / per : -((per - 1n - ticks) / per);
  return baseAt(units * per, units);
}

function baseAt(tick: bigint, units: bigint): TextBase {
  const isSafe = tick < 2n ** 53n && tick > -(2n ** 53n);
  return {
    tick,
    tickNumber: isSafe ? Number(tick) : Number.NaN,
    high: Number(units / BigInt(lowUnit)),
    low: Number(units % BigInt(lowUnit)),
  };
}

function isTagLine(bytes: Uint8Array, from: number, to: number): boolean {
  let at = from;
  while (at < to && isBlank(bytes[at]!)) at += 1;
  return at < to && bytes[at] !== HASH;
}

const isBlank = (byte: number): boolean => byte === 32 || byte === 9;

function findFields(bytes: Uint8Array, from: number, to: number, plan: TextPlan, place: LinePlace): void {
  const { delimiter, timeColumn, channelColumn } = plan;
  const last = Math.max(timeColumn, channelColumn);
  fields.timeFrom = -1;
  fields.channelFrom = -1;
  fields.columns = 0;
  let at = from;
  for (let column = 0; column <= last; column += 1) {
    while (at < to && isBlank(bytes[at]!) && bytes[at] !== delimiter) at += 1;
    // A line that ends in blanks has no further column; one that ends in a delimiter has an empty one.
    if (at >= to && (delimiter === -1 || column === 0)) break;
    fields.columns += 1;
    const isQuoted = bytes[at] === QUOTE;
    if (isQuoted) at += 1;
    const start = at;
    let end: number;
    if (isQuoted) {
      while (at < to && bytes[at] !== QUOTE) at += 1;
      if (at >= to) throw unclosed(column, place);
      end = at;
      at += 1;
      while (at < to && isBlank(bytes[at]!) && bytes[at] !== delimiter) at += 1;
    } else {
      while (at < to && !(delimiter === -1 ? isBlank(bytes[at]!) : bytes[at] === delimiter)) at += 1;
      end = at;
    }
    let first = start;
    while (first < end && isBlank(bytes[first]!)) first += 1;
    while (end > first && isBlank(bytes[end - 1]!)) end -= 1;
    if (column === timeColumn) {
      fields.timeFrom = first;
      fields.timeTo = end;
    } else if (column === channelColumn) {
      fields.channelFrom = first;
      fields.channelTo = end;
    }
    if (at >= to) break;
    if (delimiter !== -1) at += 1;
  }
}

function readTime(bytes: Uint8Array, plan: TextPlan, place: LinePlace): void {
  const { timeFrom, timeTo } = fields;
  const isThere = timeFrom >= 0;
  if (isThere && scanDecimal(bytes, timeFrom, timeTo, plan.mark, decimal)) return;
  throw wrong('a time', plan.timeColumn, isThere ? shown(bytes, timeFrom, timeTo) : null, plan, place);
}

function exactTicks(bytes: Uint8Array, plan: TextPlan, place: LinePlace): bigint {
  const ticks = exactTicksOfDecimal(decimal, plan.scale);
  if (ticks < farthestTick && ticks >= -farthestTick) return ticks;
  const found = shown(bytes, fields.timeFrom, fields.timeTo);
  throw new Problem(
    'wrong-type',
    `Expected a time within 2^63 ticks in column ${plan.timeColumn + 1} of line ${place.line}, found ${found}; correct the line, or the unit of the times.`,
    placeOf(place, plan.timeColumn),
  );
}

function readChannel(bytes: Uint8Array, plan: TextPlan, place: LinePlace): number {
  const { channelFrom, channelTo } = fields;
  const isThere = channelFrom >= 0;
  if (isThere && scanDecimal(bytes, channelFrom, channelTo, plan.mark, decimal)) {
    const { negative, lead, restDigits, exponent } = decimal;
    // Whole numbers written as 3.0 or 3.0e+00 are channels too.
    const value = exponent >= 0 ? lead * 10 ** exponent : Number.NaN;
    if (restDigits === 0 && value <= 65535 && !(negative && value > 0)) return value;
  }
  const found = isThere ? shown(bytes, channelFrom, channelTo) : null;
  throw wrong('a whole channel number from 0 to 65535', plan.channelColumn, found, plan, place);
}

function wrong(
  expected: string,
  column: number,
  found: string | null,
  plan: TextPlan,
  place: LinePlace,
): Problem {
  const count = fields.columns === 1 ? 'one column' : `${fields.columns} columns`;
  const what = found === null ? `only ${count}` : found;
  return new Problem(
    'wrong-type',
    `Expected ${expected} in column ${column + 1} of line ${place.line}, found ${what}; ${wayOut(found, plan, place)}.`,
    placeOf(place, column),
  );
}

function wayOut(found: string | null, plan: TextPlan, place: LinePlace): string {
  const otherMark = plan.mark === 46 ? ',' : '.';
  if (found !== null && new RegExp(`^"[-+]?\\d+\\${otherMark}\\d+"$`).test(found)) {
    return `choose a decimal ${plan.mark === 46 ? 'comma' : 'point'}, or the other sign between columns`;
  }
  if (place.line === plan.headerLines + 1) {
    return 'raise the number of header lines if this is a heading, or choose other columns or another sign between them';
  }
  return found === null
    ? 'complete or remove the line (a # before it passes it over)'
    : 'correct or remove the line (a # before it passes it over)';
}

function unclosed(column: number, place: LinePlace): Problem {
  return new Problem(
    'wrong-type',
    `Expected a closing quotation mark in column ${column + 1} of line ${place.line}, found the end of the line; close it, or write each tag on one line.`,
    placeOf(place, column),
  );
}

const placeOf = ({ name, line }: LinePlace, column: number): string =>
  `${name}, line ${line}, column ${column + 1}`;

const mostShown = 40;

function shown(bytes: Uint8Array, from: number, to: number): string {
  const text = new TextDecoder().decode(bytes.subarray(from, Math.min(to, from + mostShown)));
  // biome-ignore lint/suspicious/noControlCharactersInRegex: they are what must not reach a sentence
  const clean = text.replace(/[\u0000-\u001f\u007f]/g, '�');
  if (from >= to) return 'nothing';
  return `"${clean}${to - from > mostShown ? '…' : ''}"`;
}
