import type { TagColumns } from '../kernels/tag-columns';

/** Tags held at either end: a mask that takes all of them away needs the bytes. */
const EDGE_TAGS = 256;
/** Blocks whose last tags wait to be told apart. */
const MOST_WAITING = 32;

export interface EdgeTag {
  tick: bigint;
  site: number;
}

/** The earliest and the latest tags, each in order of time: they tell which tag is first and last under another mask. */
export interface EdgeTags {
  earliest: EdgeTag[];
  latest: EdgeTag[];
}

/** Follows the earliest and the latest tags of blocks; nothing is sorted while blocks come in order. */
export class EdgeKeeper {
  #edges: EdgeTags = { earliest: [], latest: [] };
  /** Last tags of blocks that may be among the latest. */
  #waiting: { refTick: bigint; time: Float64Array; site: Int32Array }[] = [];

  /** Takes the sorted tags [start, stop) into account. */
  offer({ time, site }: TagColumns, start: number, stop: number, refTick: bigint): void {
    if (stop === start) return;
    const last = this.#edges.earliest[EDGE_TAGS - 1];
    if (last === undefined || refTick + BigInt(time[start]!) < last.tick) {
      const end = Math.min(stop, start + EDGE_TAGS);
      const first = toTags({ refTick, time: time.slice(start, end), site: site.slice(start, end) });
      this.#edges = {
        ...this.#edges,
        earliest: inOrder([...this.#edges.earliest, ...first]).slice(0, EDGE_TAGS),
      };
    }
    const from = Math.max(start, stop - EDGE_TAGS);
    const late = { refTick, time: time.slice(from, stop), site: site.slice(from, stop) };
    const isFull = late.time.length === EDGE_TAGS;
    if (isFull && this.#isBefore(refTick + BigInt(late.time[0]!))) {
      this.#waiting = [late];
      this.#edges = { ...this.#edges, latest: [] };
    } else {
      this.#waiting.push(late);
      if (this.#waiting.length > MOST_WAITING) this.#settle();
    }
  }

  join(others: EdgeTags): void {
    const own = this.edges();
    this.#edges = {
      earliest: inOrder([...own.earliest, ...others.earliest]).slice(0, EDGE_TAGS),
      latest: inOrder([...own.latest, ...others.latest]).slice(-EDGE_TAGS),
    };
  }

  edges(): EdgeTags {
    this.#settle();
    return this.#edges;
  }

  /** Are all of the latest so far before this tick? */
  #isBefore(tick: bigint): boolean {
    const latest = this.#edges.latest[this.#edges.latest.length - 1];
    return (
      (latest === undefined || latest.tick < tick) &&
      this.#waiting.every(({ refTick, time }) => refTick + BigInt(time[time.length - 1]!) < tick)
    );
  }

  #settle(): void {
    const tags = [...this.#edges.latest, ...this.#waiting.flatMap(toTags)];
    this.#edges = { ...this.#edges, latest: inOrder(tags).slice(-EDGE_TAGS) };
    this.#waiting = [];
  }
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

function toTags({
  refTick,
  time,
  site,
}: {
  refTick: bigint;
  time: Float64Array;
  site: Int32Array;
}): EdgeTag[] {
  return Array.from(time, (tick, i) => ({ tick: refTick + BigInt(tick), site: site[i]! }));
}

function inOrder(tags: EdgeTag[]): EdgeTag[] {
  return tags.sort((a, b) => (a.tick < b.tick ? -1 : a.tick > b.tick ? 1 : 0));
}
