import type { TagColumns } from './tag-columns';

const RUN = 32;

/**
 * Puts tags [start, stop) in time order, in place. Made for nearly sorted streams (channel delays, several readout
 * queues): insertion sort on short runs, then merges that touch only where two runs overlap. O(n) when sorted,
 * O(n log n) at worst. `scratch` lends its columns and is overwritten.
 */
export function sortTags(tags: TagColumns, start: number, stop: number, scratch: TagColumns): void {
  const { time, site } = tags;
  if (isSorted(time, start, stop)) return;
  for (let run = start; run < stop; run += RUN) sortRun(time, site, run, Math.min(run + RUN, stop));
  scratch.reserve(stop - start);
  for (let width = RUN; width < stop - start; width *= 2) {
    for (let low = start; low + width < stop; low += 2 * width) {
      const middle = low + width;
      if (time[middle - 1]! > time[middle]!) {
        mergeRuns(time, site, low, middle, Math.min(middle + width, stop), scratch);
      }
    }
  }
}

function isSorted(time: Float64Array, start: number, stop: number): boolean {
  for (let i = start + 1; i < stop; i++) if (time[i - 1]! > time[i]!) return false;
  return true;
}

function sortRun(time: Float64Array, site: Int32Array, start: number, stop: number): void {
  for (let i = start + 1; i < stop; i++) {
    const t = time[i]!;
    const s = site[i]!;
    let j = i - 1;
    while (j >= start && time[j]! > t) {
      time[j + 1] = time[j]!;
      site[j + 1] = site[j]!;
      j -= 1;
    }
    time[j + 1] = t;
    site[j + 1] = s;
  }
}

function mergeRuns(
  time: Float64Array,
  site: Int32Array,
  low: number,
  middle: number,
  high: number,
  scratch: TagColumns,
): void {
  // Left tags not after the first right one, and right tags not before the last left one, are in place already.
  const start = firstAbove(time, low, middle, time[middle]!);
  const stop = firstAtLeast(time, middle, high, time[middle - 1]!);
  const leftTime = scratch.time;
  const leftSite = scratch.site;
  const left = middle - start;
  leftTime.set(time.subarray(start, middle));
  leftSite.set(site.subarray(start, middle));
  let i = 0;
  let j = middle;
  let at = start;
  while (i < left && j < stop) {
    if (leftTime[i]! <= time[j]!) {
      time[at] = leftTime[i]!;
      site[at] = leftSite[i]!;
      i += 1;
    } else {
      time[at] = time[j]!;
      site[at] = site[j]!;
      j += 1;
    }
    at += 1;
  }
  // Whatever is left of the right run is in place already.
  for (; i < left; i++, at++) {
    time[at] = leftTime[i]!;
    site[at] = leftSite[i]!;
  }
}

/** First index in sorted [start, stop) whose time is at least `t`, else `stop`. */
export function firstAtLeast(time: Float64Array, start: number, stop: number, t: number): number {
  let low = start;
  let high = stop;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (time[middle]! < t) low = middle + 1;
    else high = middle;
  }
  return low;
}

/** First index in sorted [start, stop) whose time is above `t`, else `stop`. */
export function firstAbove(time: Float64Array, start: number, stop: number, t: number): number {
  let low = start;
  let high = stop;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (time[middle]! <= t) low = middle + 1;
    else high = middle;
  }
  return low;
}
