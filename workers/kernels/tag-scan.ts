import type { TagColumns } from './tag-columns';
import { firstAtLeast } from './tag-sort';

/**
 * All-pairs coincidence scans: every (A tag, B tag) pair with tau = t_B - t_A in range, each pair once. One forward
 * pass over the merged time-ordered stream, O(tags + pairs within reach). No allocation per event.
 */
export interface ScanRange {
  /** Sites below this are arm A. */
  sitesA: number;
  /** Smallest and largest tau of any use, whole ticks, both included; min > max when nothing is to be found. */
  minTauTick: number;
  maxTauTick: number;
  /** Histogram: bin m covers [lo + m*bin, lo + (m+1)*bin), whole ticks. */
  loTick: number;
  binTick: number;
  /** Hull of the prompt and shifted windows, both ends included; lo > hi when there are none. */
  hullLoTick: number;
  hullHiTick: number;
}

/** Columns of candidate pairs. */
export interface PairCandidates {
  readonly capacity: number;
  /** Time of the A tag, against the reference of the scanned columns. */
  readonly timeA: Float64Array;
  readonly tau: Float64Array;
  readonly pixelA: Int32Array;
  readonly pixelB: Int32Array;
}

/** A scan fills the columns and calls `drain` when they are full and at its end. */
export interface PairSink extends PairCandidates {
  drain(count: number): void;
}

/** Pairs within sorted tags [start, stop): delay histogram only. */
export function scanHistogram(
  tags: TagColumns,
  start: number,
  stop: number,
  range: ScanRange,
  counts: Float64Array,
): void {
  const { time, site } = tags;
  const { sitesA, loTick, binTick } = range;
  const spanTick = counts.length * binTick;
  const reachA = range.maxTauTick;
  const reachB = -range.minTauTick;
  const reach = Math.max(reachA, reachB);
  for (let i = start; i < stop; i++) {
    const t = time[i]!;
    // Most tags have no near neighbour: say so before the branch on the arm, which cannot be predicted.
    if (i + 1 < stop && time[i + 1]! > t + reach) continue;
    const first = site[i]! < sitesA;
    const limit = t + (first ? reachA : reachB);
    for (let j = i + 1; j < stop; j++) {
      const later = time[j]!;
      if (later > limit) break;
      if (site[j]! < sitesA === first) continue;
      const from = (first ? later - t : t - later) - loTick;
      // Whole numbers below 2^53: the quotient never rounds up across a bin edge.
      if (from >= 0 && from < spanTick) counts[(from / binTick) | 0]! += 1;
    }
  }
}

/** Pairs within sorted tags [start, stop): delay histogram, and candidates of the windows into `sink`. */
export function scanWindows(
  tags: TagColumns,
  start: number,
  stop: number,
  range: ScanRange,
  counts: Float64Array,
  sink: PairSink,
): void {
  const { time, site } = tags;
  const { sitesA, loTick, binTick, hullLoTick, hullHiTick } = range;
  const { timeA, tau: tauOut, pixelA, pixelB, capacity } = sink;
  const spanTick = counts.length * binTick;
  const reachA = range.maxTauTick;
  const reachB = -range.minTauTick;
  const reach = Math.max(reachA, reachB);
  let filled = 0;
  for (let i = start; i < stop; i++) {
    const t = time[i]!;
    // As in `scanHistogram`.
    if (i + 1 < stop && time[i + 1]! > t + reach) continue;
    const s = site[i]!;
    const first = s < sitesA;
    const limit = t + (first ? reachA : reachB);
    for (let j = i + 1; j < stop; j++) {
      const later = time[j]!;
      if (later > limit) break;
      const other = site[j]!;
      if (other < sitesA === first) continue;
      const tau = first ? later - t : t - later;
      const from = tau - loTick;
      if (from >= 0 && from < spanTick) counts[(from / binTick) | 0]! += 1;
      if (tau >= hullLoTick && tau <= hullHiTick) {
        timeA[filled] = first ? t : later;
        tauOut[filled] = tau;
        pixelA[filled] = first ? s : other;
        pixelB[filled] = (first ? other : s) - sitesA;
        filled += 1;
        if (filled === capacity) {
          sink.drain(filled);
          filled = 0;
        }
      }
    }
  }
  sink.drain(filled);
}

/**
 * Pairs of one tag of `left` and one tag of `right` [start, stop), both sorted and on the same reference: what meets
 * across the border of two blocks or two ranges. Times may overlap in any way.
 */
export function scanBetween(
  left: TagColumns,
  leftStop: number,
  right: TagColumns,
  start: number,
  stop: number,
  range: ScanRange,
  counts: Float64Array,
  sink: PairSink,
): void {
  const { sitesA, loTick, binTick, hullLoTick, hullHiTick } = range;
  const { timeA, tau: tauOut, pixelA, pixelB, capacity } = sink;
  const spanTick = counts.length * binTick;
  const reach = Math.max(range.maxTauTick, -range.minTauTick);
  if (leftStop === 0 || start >= stop) return;
  const lastUseful = left.time[leftStop - 1]! + reach;
  let low = firstAtLeast(left.time, 0, leftStop, right.time[start]! - reach);
  let filled = 0;
  for (let i = start; i < stop; i++) {
    const t = right.time[i]!;
    if (t > lastUseful) break;
    const s = right.site[i]!;
    const first = s < sitesA;
    while (low < leftStop && left.time[low]! < t - reach) low += 1;
    for (let j = low; j < leftStop; j++) {
      const t2 = left.time[j]!;
      if (t2 > t + reach) break;
      const other = left.site[j]!;
      if (other < sitesA === first) continue;
      const tau = first ? t2 - t : t - t2;
      const from = tau - loTick;
      if (from >= 0 && from < spanTick) counts[(from / binTick) | 0]! += 1;
      if (tau >= hullLoTick && tau <= hullHiTick) {
        timeA[filled] = first ? t : t2;
        tauOut[filled] = tau;
        pixelA[filled] = first ? s : other;
        pixelB[filled] = (first ? other : s) - sitesA;
        filled += 1;
        if (filled === capacity) {
          sink.drain(filled);
          filled = 0;
        }
      }
    }
  }
  sink.drain(filled);
}
