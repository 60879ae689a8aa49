import type { ReaderFacts, ReadRange } from '../../shared/contracts/reader';

/**
 * The tasks a file is cut into. They depend on the file alone, never on the number of workers, and parts are merged in
 * file order: floating sums come out bit by bit the same on one worker, on many, and on another machine. Where a counter
 * rolls over, chunks tell each other their rollovers (`OffsetChain`); their bytes, some 32 MiB, stay at hand meanwhile.
 */
const FIRST_RECORDS = 2 ** 19;
/** Records of the first look for the coincidence peak: whole chunks, so that their pairs tell it as well. */
export const SEARCH_RECORDS = 2 * FIRST_RECORDS;
const RECORDS = 2 ** 22;
const PIXELS = 2 ** 23;
const LEAST_FRAMES = 16;

export function planChunks(facts: ReaderFacts): ReadRange[] {
  if (facts.kind === 'frames') {
    const frames = Math.max(LEAST_FRAMES, Math.floor(PIXELS / (facts.width * facts.height)));
    return cut(facts.frames, Math.max(LEAST_FRAMES, Math.floor(frames / 2)), frames);
  }
  return cut(facts.records, FIRST_RECORDS, RECORDS);
}

/** The first two chunks are short, so that there is a picture within the first second. */
function cut(total: number, first: number, next: number): ReadRange[] {
  const ranges: ReadRange[] = [];
  for (let start = 0; start < total; ) {
    const end = Math.min(total, start + (start < 2 * first ? first : next));
    ranges.push({ start, end });
    start = end;
  }
  return ranges;
}
