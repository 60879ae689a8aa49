import { firstAbove, firstAtLeast } from './tag-sort';

/** A list of whole ticks in time order. */
export type TickList = Float64Array;

/** lo <= t2 - t1 <= hi, whole ticks, both ends included. */
export interface TickWindow {
  loTick: number;
  hiTick: number;
}

/**
 * Coincidences between separate sorted lists, each pair once; all add to the caller's array. O(tags + pairs): the lower
 * end of the window moves forward only. An empty list adds nothing. Two implementations of one meaning:
 * `scriptListScans` here, `compileListScans` (./tag-lists-wasm).
 */
export interface ListScans {
  /** Delay histogram: out[floor((y - x - loTick) / binTick)] += 1 for 0 <= y - x - loTick < out.length * binTick. */
  histogram(x: TickList, y: TickList, loTick: number, binTick: number, out: Float64Array): void;
  /** Coincidence matrix: out[siteY * sitesX + siteX] += 1 for each pair with y - x in the window. */
  matrix(
    x: TickList,
    siteX: Uint16Array,
    y: TickList,
    siteY: Uint16Array,
    window: TickWindow,
    sitesX: number,
    out: Float64Array,
  ): void;
  /**
   * Heralded images of x, one a window (the prompt and the shifted ones): outs[w][siteX] += 1 for every herald with
   * x - herald in windows[w]. A tag with two heralds in its window counts twice, as in the matrix.
   */
  images(
    x: TickList,
    siteX: Uint16Array,
    herald: TickList,
    windows: readonly TickWindow[],
    outs: readonly Float64Array[],
  ): void;
  /**
   * Threefold coincidences per herald, with n1 and n2 tags of the arms in their windows of t - herald: out[0] += heralds
   * with n1 > 0, out[1] += with n2 > 0, out[2] += with both, out[3] += sum of n1 n2. From them
   * g2(0) = out[2] * heralds / (out[0] * out[1]) (Grangier, Roger, Aspect 1986).
   */
  triples(
    herald: TickList,
    one: TickList,
    windowOne: TickWindow,
    two: TickList,
    windowTwo: TickWindow,
    out: Float64Array,
  ): void;
}

export const scriptListScans: ListScans = {
  histogram(x, y, loTick, binTick, out) {
    const spanTick = out.length * binTick;
    let low = 0;
    for (let i = 0; i < x.length; i++) {
      const from = x[i]! + loTick;
      while (low < y.length && y[low]! < from) low += 1;
      for (let j = low; j < y.length; j++) {
        const past = y[j]! - from;
        if (past >= spanTick) break;
        out[(past / binTick) | 0]! += 1;
      }
    }
  },
  matrix(x, siteX, y, siteY, { loTick, hiTick }, sitesX, out) {
    let low = 0;
    for (let i = 0; i < x.length; i++) {
      const t = x[i]!;
      while (low < y.length && y[low]! < t + loTick) low += 1;
      for (let j = low; j < y.length && y[j]! <= t + hiTick; j++) out[siteY[j]! * sitesX + siteX[i]!]! += 1;
    }
  },
  images(x, siteX, herald, windows, outs) {
    windows.forEach(({ loTick, hiTick }, w) => {
      const out = outs[w]!;
      let low = 0;
      for (let i = 0; i < x.length; i++) {
        const t = x[i]!;
        while (low < herald.length && herald[low]! < t - hiTick) low += 1;
        for (let j = low; j < herald.length && herald[j]! <= t - loTick; j++) out[siteX[i]!]! += 1;
      }
    });
  },
  triples(herald, one, windowOne, two, windowTwo, out) {
    const inOne = countIn(one, windowOne);
    const inTwo = countIn(two, windowTwo);
    for (let i = 0; i < herald.length; i++) {
      const n1 = inOne(herald[i]!);
      const n2 = inTwo(herald[i]!);
      if (n1 > 0) out[0]! += 1;
      if (n2 > 0) out[1]! += 1;
      if (n1 > 0 && n2 > 0) out[2]! += 1;
      out[3]! += n1 * n2;
    }
  },
};

/** Tags in the window after a herald; heralds must come in time order. */
function countIn(list: TickList, { loTick, hiTick }: TickWindow): (herald: number) => number {
  let low = 0;
  let high = 0;
  return (herald) => {
    while (low < list.length && list[low]! < herald + loTick) low += 1;
    high = Math.max(high, low);
    while (high < list.length && list[high]! <= herald + hiTick) high += 1;
    return high - low;
  };
}

/** Indices [start, stop) of the sorted list with from <= t <= to, searched from `start` on by doubling steps. */
export function rangeWithin(list: TickList, start: number, from: number, to: number): [number, number] {
  const low = firstAtLeast(list, start, reachFrom(list, start, from), from);
  return [low, firstAbove(list, low, reachFrom(list, low, to), to)];
}

function reachFrom(list: TickList, start: number, t: number): number {
  let step = 1024;
  while (start + step < list.length && list[start + step]! <= t) step *= 2;
  return Math.min(list.length, start + step + 1);
}
