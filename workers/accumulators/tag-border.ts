import { rebaseTick } from '../../shared/units/ticks';
import { TagColumns } from '../kernels/tag-columns';
import { sortTags } from '../kernels/tag-sort';

/**
 * The tags at one end of a range that may still meet tags of a neighbouring range.
 * Head: all tags up to `markTick`. Tail: all tags from `markTick` minus horizon and reach on, `markTick` being the
 * latest time. Times are ticks after `refTick`.
 */
export interface TagBorder {
  refTick: bigint;
  markTick: number;
  tags: TagColumns;
}

/** A border as plain data: structured-clone-able, sorted by time. */
export interface TagBorderPart {
  refTick: bigint;
  markTick: number;
  time: Float64Array;
  site: Int32Array;
}

export function createBorder(tags = new TagColumns()): TagBorder {
  return { refTick: 0n, markTick: Number.NEGATIVE_INFINITY, tags };
}

export function borderToPart(border: TagBorder): TagBorderPart {
  const { time, site, count } = border.tags;
  sortTags(border.tags, 0, count, new TagColumns());
  return {
    refTick: border.refTick,
    markTick: border.markTick,
    time: time.slice(0, count),
    site: site.slice(0, count),
  };
}

export function borderFromPart(part: TagBorderPart): TagBorder {
  const tags = new TagColumns(part.time.length);
  tags.append(part.time, part.site, 0, part.time.length, 0);
  return { refTick: part.refTick, markTick: part.markTick, tags };
}

/** The tail seen from another reference. More than 2^53 ticks away nothing can meet it any more: it is emptied. */
export function rebaseTail(tail: TagBorder, refTick: bigint): void {
  const shift = rebaseTick(tail.refTick, refTick);
  tail.refTick = refTick;
  if (!Number.isNaN(shift)) {
    tail.tags.shift(shift);
    tail.markTick += shift;
  } else {
    tail.tags.count = 0;
    tail.markTick = Number.NEGATIVE_INFINITY;
  }
}

/** Adds to a head those of the sorted tags [start, stop) that lie within it. */
export function offerToHead(
  head: TagBorder,
  tags: TagColumns,
  start: number,
  stop: number,
  refTick: bigint,
): void {
  const shift = rebaseTick(refTick, head.refTick);
  if (Number.isNaN(shift)) return;
  const { time } = tags;
  let end = start;
  while (end < stop && time[end]! + shift <= head.markTick) end += 1;
  head.tags.append(time, tags.site, start, end, shift);
}

/** The head of two ranges in order. Each is complete up to its own mark, so together up to the smaller one. */
export function joinHeads(head: TagBorder, next: TagBorder): void {
  const shift = rebaseTick(next.refTick, head.refTick);
  if (Number.isNaN(shift)) return;
  head.markTick = Math.min(head.markTick, next.markTick + shift);
  sortTags(next.tags, 0, next.tags.count, new TagColumns());
  offerToHead(head, next.tags, 0, next.tags.count, next.refTick);
  const { time, site, count } = head.tags;
  let kept = 0;
  for (let i = 0; i < count; i++) {
    if (time[i]! > head.markTick) continue;
    time[kept] = time[i]!;
    site[kept] = site[i]!;
    kept += 1;
  }
  head.tags.count = kept;
}
