import type { TagColumns } from '../kernels/tag-columns';

/** Tags held at either end: a mask that takes all of them away needs the bytes. */
const EDGE_TAGS = 256;

export interface EdgeTag {
  tick: bigint;
  site: number;
}

/** The earliest and the latest tags, each in order of time: they tell which tag is first and last under another mask. */
export interface EdgeTags {
  earliest: EdgeTag[];
  latest: EdgeTag[];
}

export function noEdges(): EdgeTags {
  return { earliest: [], latest: [] };
}

/** Takes the sorted tags [start, stop) into account; most calls look at two times only. */
export function offerEdges(
  edges: EdgeTags,
  tags: TagColumns,
  start: number,
  stop: number,
  refTick: bigint,
): void {
  const at = (i: number): EdgeTag => ({ tick: refTick + BigInt(tags.time[i]!), site: tags.site[i]! });
  const last = edges.earliest[EDGE_TAGS - 1];
  if (last === undefined || at(start).tick < last.tick) {
    const length = Math.min(EDGE_TAGS, stop - start);
    edges.earliest = earliestOf([...edges.earliest, ...Array.from({ length }, (_, i) => at(start + i))]);
  }
  const first = edges.latest.length < EDGE_TAGS ? undefined : edges.latest[0];
  if (first === undefined || at(stop - 1).tick > first.tick) {
    const length = Math.min(EDGE_TAGS, stop - start);
    const tail = Array.from({ length }, (_, i) => at(stop - length + i));
    edges.latest = latestOf([...edges.latest, ...tail]);
  }
}

export function joinEdges(edges: EdgeTags, next: EdgeTags): EdgeTags {
  return {
    earliest: earliestOf([...edges.earliest, ...next.earliest]),
    latest: latestOf([...edges.latest, ...next.latest]),
  };
}

/**
 * First and last tag among the sites that are kept; null when the edges do not reach far enough to tell. They hold all
 * tags when there are fewer of them than places.
 */
export function edgeTicks(
  { earliest, latest }: EdgeTags,
  isKept: (site: number) => boolean,
): { firstTick: bigint; lastTick: bigint } | null {
  const first = earliest.find(({ site }) => isKept(site));
  const last = latest.findLast(({ site }) => isKept(site));
  return first === undefined || last === undefined ? null : { firstTick: first.tick, lastTick: last.tick };
}

function earliestOf(tags: EdgeTag[]): EdgeTag[] {
  return inOrder(tags).slice(0, EDGE_TAGS);
}

function latestOf(tags: EdgeTag[]): EdgeTag[] {
  return inOrder(tags).slice(-EDGE_TAGS);
}

function inOrder(tags: EdgeTag[]): EdgeTag[] {
  return tags.sort((a, b) => (a.tick < b.tick ? -1 : a.tick > b.tick ? 1 : 0));
}
