import type { TagBlock } from '../../shared/contracts/blocks';
import type { CancelToken, Reader } from '../../shared/contracts/reader';

/** What is known of every page of a file of tags, so that parts of it can be read by time. */
export interface TimeIndex {
  reader: Reader;
  tickFs: number;
  records: number;
  pages: TimePage[];
  /** Earliest and latest tag; null without tags. */
  firstTick: bigint | null;
  lastTick: bigint | null;
  tags: number;
}

interface TimePage {
  /** Its first record. */
  start: number;
  /** Rollovers before the page. */
  offsetTick: bigint;
  /** Tags in all pages before it, and the latest of them; null before the first tag. */
  tagsBefore: number;
  latestBefore: bigint | null;
}

/** Tags of one page in file order: `baseTick` and whole differences. */
export interface TagPage {
  baseTick: bigint;
  deltaTick: Float64Array;
  channel: Uint16Array;
  count: number;
}

export const pageRecords = 2 ** 16;
/** Tags of a page further from its base than this begin a page of their own: differences stay exact in doubles. */
const farthestTick = 2n ** 52n;

/** Goes through the whole file once. Memory: some tens of bytes a page. */
export async function buildTimeIndex(
  reader: Reader,
  token: CancelToken,
  onBytes?: (bytes: number) => void,
): Promise<TimeIndex> {
  const { facts } = reader;
  const records = facts.kind === 'tags' ? facts.records : 0;
  const index: TimeIndex = {
    reader,
    tickFs: facts.kind === 'tags' ? facts.tickFs : 1,
    records,
    pages: [],
    firstTick: null,
    lastTick: null,
    tags: 0,
  };
  for (let start = 0; start < records; ) {
    const offsetTick = await reader.tickOffsetAt(start, token);
    index.pages.push({ start, offsetTick, tagsBefore: index.tags, latestBefore: index.lastTick });
    let end = Math.min(records, start + pageRecords);
    let pageTick: bigint | null = null;
    for await (const block of reader.read({ start, end }, offsetTick, token)) {
      if (block.kind !== 'tags') continue;
      if (block.count > 0) {
        const ends = endsOf(block);
        if (pageTick !== null && isFar(ends, pageTick)) {
          end = block.firstRecord;
          break;
        }
        pageTick ??= block.baseTick;
        noteBlock(index, block.count, ends);
      }
      onBytes?.(block.bytes);
    }
    start = end;
  }
  return index;
}

/** Earliest and latest tag. */
function endsOf({ baseTick, deltaTick, count }: TagBlock): [bigint, bigint] {
  let low = deltaTick[0]!;
  let high = low;
  for (let i = 1; i < count; i += 1) {
    const delta = deltaTick[i]!;
    if (delta < low) low = delta;
    if (delta > high) high = delta;
  }
  return [baseTick + BigInt(low), baseTick + BigInt(high)];
}

function isFar([first, last]: [bigint, bigint], fromTick: bigint): boolean {
  return first - fromTick < -farthestTick || last - fromTick > farthestTick;
}

function noteBlock(index: TimeIndex, count: number, [first, last]: [bigint, bigint]): void {
  if (index.firstTick === null || first < index.firstTick) index.firstTick = first;
  if (index.lastTick === null || last > index.lastTick) index.lastTick = last;
  index.tags += count;
}

/** The tags of a page about one base. */
export async function readPage(index: TimeIndex, page: number, token: CancelToken): Promise<TagPage> {
  const { start, offsetTick } = index.pages[page]!;
  const range = { start, end: index.pages[page + 1]?.start ?? index.records };
  const length = range.end - range.start;
  const found: TagPage = {
    baseTick: 0n,
    deltaTick: new Float64Array(length),
    channel: new Uint16Array(length),
    count: 0,
  };
  for await (const block of index.reader.read(range, offsetTick, token)) {
    if (block.kind !== 'tags' || block.count === 0) continue;
    if (found.count === 0) found.baseTick = block.baseTick;
    const shift = Number(block.baseTick - found.baseTick);
    for (let i = 0; i < block.count; i += 1) found.deltaTick[found.count + i] = block.deltaTick[i]! + shift;
    found.channel.set(block.channel.subarray(0, block.count), found.count);
    found.count += block.count;
  }
  return found;
}

/** The last page all tags before which pass: the first tag that does not lies in it or behind. `passes` holds up to some tick. */
export function pageWhere(index: TimeIndex, passes: (latestTick: bigint) => boolean): number {
  let low = 0;
  let high = index.pages.length;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    const latest = index.pages[middle]!.latestBefore;
    if (latest === null || passes(latest)) low = middle;
    else high = middle;
  }
  return low;
}

/** Tags [from, to) by their number in the file, about one base. */
export async function readTagRange(
  index: TimeIndex,
  from: number,
  to: number,
  token: CancelToken,
): Promise<TagPage> {
  const found: TagPage = {
    baseTick: 0n,
    deltaTick: new Float64Array(to - from),
    channel: new Uint16Array(to - from),
    count: 0,
  };
  let page = pageOfTag(index, from);
  while (found.count < to - from) {
    const tags = await readPage(index, page, token);
    const before = index.pages[page]!.tagsBefore;
    const start = from + found.count - before;
    const end = Math.min(tags.count, to - before);
    if (found.count === 0) found.baseTick = tags.baseTick;
    const shift = Number(tags.baseTick - found.baseTick);
    for (let i = start; i < end; i += 1) {
      found.deltaTick[found.count] = tags.deltaTick[i]! + shift;
      found.channel[found.count] = tags.channel[i]!;
      found.count += 1;
    }
    page += 1;
  }
  return found;
}

function pageOfTag(index: TimeIndex, tag: number): number {
  let low = 0;
  let high = index.pages.length;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (index.pages[middle]!.tagsBefore <= tag) low = middle;
    else high = middle;
  }
  return low;
}
