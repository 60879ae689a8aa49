import type { ReadRange } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';

/** The range itself when it lies inside [0, total); a slice outside would read another record's memory. */
export function assertRange(range: ReadRange, total: number, what: string, place: string): ReadRange {
  const whole = Number.isSafeInteger(range.start) && Number.isSafeInteger(range.end);
  if (whole && range.start >= 0 && range.start <= range.end && range.end <= total) return range;
  throw new Problem(
    'bad-input',
    `Expected a range of ${what} inside 0..${total}, found ${range.start}..${range.end}; ask for a range within the file.`,
    place,
  );
}

/** Bytes of a file of `size` that stand for items [start, end) of `total`; consecutive ranges add up to the size. */
export function bytesOfRange(size: number, start: number, end: number, total: number): number {
  if (total === 0) return 0;
  return Math.floor((size * end) / total) - Math.floor((size * start) / total);
}
