import type { TagBlock } from '../../shared/contracts/blocks';
import type { CancelToken, Reader } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';
import { type ClockMap, createClockMap, mapTick, mapTicks } from './clock-map';
import { assertRange } from './ranges';
import {
  buildTimeIndex,
  pageWhere,
  readPage,
  readTagRange,
  type TagPage,
  type TimeIndex,
} from './time-index';
import { passTurn } from './turn';

export interface ClockPairFile {
  name: string;
  reader: Reader;
  /** Of the file, for progress. */
  bytes: number;
}

export interface ClockPairLayout {
  channelOffset: number;
  clock: { offsetPs: number; drift: number };
}

/** Where a stretch begins: in a page of the main file, in the companion, and in the merged tags. */
interface Border {
  page: number;
  /** Tags of the page before it. */
  ownTag: number;
  companionTag: number;
  merged: number;
}

/**
 * Tags of two files of two clocks as one stream in time order, those of the companion moved to the main clock. A record
 * is a tag. Each page of the main file is merged with the companion's tags up to the first one later than all main tags
 * before the next page, and cut again at every page of the companion, so that a stretch holds a page of each at most,
 * whichever file is the denser or the longer. Borders depend on the files alone and any split gives the same tags. Both
 * files are gone through once on opening, and parts of them once more to find the borders.
 * @throws Problem `wrong-type` for frames, `bad-input` where channels pass 65535 on reading.
 */
export async function openClockPair(
  main: ClockPairFile,
  companion: ClockPairFile,
  { channelOffset, clock }: ClockPairLayout,
): Promise<Reader> {
  for (const { name, reader } of [main, companion]) {
    if (reader.facts.kind === 'tags') continue;
    throw new Problem(
      'wrong-type',
      `Expected time tags in ${name}, found frames: only tags of two clocks can be merged; choose a file of tags.`,
      name,
    );
  }
  const opening = { cancelled: false };
  const a = await buildTimeIndex(main.reader, opening);
  const b = await buildTimeIndex(companion.reader, opening);
  const map = createClockMap(b.tickFs, a.tickFs, clock);
  const borders = await findBorders(a, b, map, opening);
  const total = a.tags + b.tags;
  const bytesPerTag = total === 0 ? 0 : (main.bytes + companion.bytes) / total;
  return {
    facts: { kind: 'tags', records: total, tickFs: a.tickFs, reader: main.reader.facts.reader },
    tickOffsetAt: async () => 0n,
    async *read(range, tickOffset, token) {
      assertRange(range, total, 'tags', main.name);
      let held: { page: number; tags: TagPage } = { page: -1, tags: emptyPage() };
      for (let stretch = 0; stretch + 1 < borders.length; stretch += 1) {
        const [from, to] = [borders[stretch]!, borders[stretch + 1]!];
        if (to.merged <= range.start || from.merged >= range.end) continue;
        await passTurn(token);
        const { page } = from;
        if (page !== held.page) held = { page, tags: await mainPage(a, page, token) };
        const own = tagsBetween(held.tags, from.ownTag, to.page === page ? to.ownTag : held.tags.count);
        const other = await readTagRange(b, from.companionTag, to.companionTag, token);
        const merged = merge(own, other, map, channelOffset, companion.name);
        const start = Math.max(0, range.start - from.merged);
        const end = Math.min(merged.count, range.end - from.merged);
        yield blockOf(merged, start, end, from.merged, tickOffset, bytesPerTag);
      }
    },
    async close() {
      await main.reader.close();
      await companion.reader.close();
    },
  };
}

const emptyPage = (): TagPage => ({
  baseTick: 0n,
  deltaTick: new Float64Array(0),
  channel: new Uint16Array(0),
  count: 0,
});

/** Behind the last page there are no tags. */
async function mainPage(a: TimeIndex, page: number, token: CancelToken): Promise<TagPage> {
  return page < a.pages.length ? readPage(a, page, token) : emptyPage();
}

function tagsBetween({ baseTick, deltaTick, channel }: TagPage, start: number, end: number): TagPage {
  return {
    baseTick,
    deltaTick: deltaTick.subarray(start, end),
    channel: channel.subarray(start, end),
    count: end - start,
  };
}

/**
 * One border before every main page, one before what is left of the companion, one at the end, and between them one at
 * every page of the companion.
 */
async function findBorders(a: TimeIndex, b: TimeIndex, map: ClockMap, token: CancelToken): Promise<Border[]> {
  const borders: Border[] = [{ page: 0, ownTag: 0, companionTag: 0, merged: 0 }];
  const cuts = b.pages.filter(({ tagsBefore }, p) => tagsBefore > (b.pages[p - 1]?.tagsBefore ?? 0));
  let nextCut = 0;
  /** Borders at the companion's pages, among its tags before `end` that are merged with this main page. */
  const cutUpTo = async (page: number, end: number): Promise<void> => {
    const start = borders.at(-1)!.companionTag;
    while (nextCut < cuts.length && cuts[nextCut]!.tagsBefore <= start) nextCut += 1;
    if (!(nextCut < cuts.length && cuts[nextCut]!.tagsBefore < end)) return;
    const { baseTick, deltaTick, count } = await mainPage(a, page, token);
    const before = a.pages[page]?.tagsBefore ?? a.tags;
    let ownTag = 0;
    for (; nextCut < cuts.length && cuts[nextCut]!.tagsBefore < end; nextCut += 1) {
      const { tagsBefore: companionTag, latestBefore } = cuts[nextCut]!;
      // Merging takes main tags until one is later than every companion tag before the cut.
      const limit = Number(mapTick(map, latestBefore!) - baseTick);
      while (ownTag < count && deltaTick[ownTag]! <= limit) ownTag += 1;
      borders.push({ page, ownTag, companionTag, merged: before + ownTag + companionTag });
    }
  };
  let held: { page: number; zeroTick: bigint; mapped: Float64Array } = {
    page: -1,
    zeroTick: 0n,
    mapped: new Float64Array(0),
  };
  for (let k = 1; k <= a.pages.length; k += 1) {
    const tagsBefore = a.pages[k]?.tagsBefore ?? a.tags;
    const latest = k < a.pages.length ? a.pages[k]!.latestBefore : a.lastTick;
    let companionTag = borders.at(-1)!.companionTag;
    if (latest !== null && b.pages.length > 0) {
      const page = pageWhere(b, (tick) => mapTick(map, tick) <= latest);
      if (held.page !== page) held = { page, ...(await readMapped(b, page, map, token)) };
      const { zeroTick, mapped } = held;
      const limit = Number(latest - zeroTick);
      const later = mapped.findIndex((tick) => tick > limit);
      const upTo = b.pages[page]!.tagsBefore + (later < 0 ? mapped.length : later);
      companionTag = Math.max(companionTag, upTo);
    }
    await cutUpTo(k - 1, companionTag);
    borders.push({ page: k, ownTag: 0, companionTag, merged: tagsBefore + companionTag });
  }
  await cutUpTo(a.pages.length, b.tags);
  borders.push({ page: a.pages.length, ownTag: 0, companionTag: b.tags, merged: a.tags + b.tags });
  return borders;
}

async function readMapped(
  b: TimeIndex,
  page: number,
  map: ClockMap,
  token: CancelToken,
): Promise<{ zeroTick: bigint; mapped: Float64Array }> {
  const { baseTick, deltaTick, count } = await readPage(b, page, token);
  const zeroTick = mapTick(map, baseTick);
  const mapped = new Float64Array(count);
  mapTicks(map, baseTick, deltaTick, count, zeroTick, mapped);
  return { zeroTick, mapped };
}

/**
 * Merges by time, main tags first where times agree; each file keeps its own order, so tags a little late stay so. No
 * tags of one side: the other's as they are.
 */
function merge(own: TagPage, other: TagPage, map: ClockMap, channelOffset: number, name: string): TagPage {
  const baseTick = own.count > 0 ? own.baseTick : mapTick(map, other.baseTick);
  const moved = new Float64Array(other.count);
  mapTicks(map, other.baseTick, other.deltaTick, other.count, baseTick, moved);
  const count = own.count + other.count;
  const deltaTick = new Float64Array(count);
  const channel = new Uint16Array(count);
  for (let to = 0, i = 0, j = 0; to < count; to += 1) {
    if (j >= other.count || (i < own.count && own.deltaTick[i]! <= moved[j]!)) {
      deltaTick[to] = own.deltaTick[i]!;
      channel[to] = own.channel[i]!;
      i += 1;
    } else {
      const shifted = other.channel[j]! + channelOffset;
      if (shifted > 65535) throw tooHigh(other.channel[j]!, channelOffset, name);
      deltaTick[to] = moved[j]!;
      channel[to] = shifted;
      j += 1;
    }
  }
  return { baseTick, deltaTick, channel, count };
}

function tooHigh(channel: number, offset: number, name: string): Problem {
  return new Problem(
    'bad-input',
    `Expected channels up to 65535 in the second file, found ${channel} + ${offset}; add less to its channels.`,
    name,
  );
}

function blockOf(
  { baseTick, deltaTick, channel }: TagPage,
  start: number,
  end: number,
  firstRecord: number,
  tickOffset: bigint,
  bytesPerTag: number,
): TagBlock {
  const at = firstRecord + start;
  return {
    kind: 'tags',
    firstRecord: at,
    records: end - start,
    baseTick: baseTick + tickOffset,
    deltaTick: deltaTick.subarray(start, end),
    channel: channel.subarray(start, end),
    count: end - start,
    bytes: Math.floor((at + end - start) * bytesPerTag) - Math.floor(at * bytesPerTag),
  };
}
