import { findPeak } from './find-peak';
import { type BinnedCounts, fitPeak, type PeakFit } from './fit-peak';

const bins = 1024;
const mostZooms = 8;

/**
 * Counts of all differences a - b in bins from `lo` on. Both sorted. Cost O(clicks + pairs).
 */
export function binDifferences(
  a: Float64Array,
  b: Float64Array,
  lo: number,
  step: number,
  count: number,
): BinnedCounts {
  const counts = new Float64Array(count);
  const hi = lo + step * count;
  let first = 0;
  for (let j = 0; j < b.length; j += 1) {
    const zero = b[j]! + lo;
    while (first < a.length && a[first]! < zero) first += 1;
    const end = b[j]! + hi;
    for (let i = first; i < a.length && a[i]! < end; i += 1) {
      const bin = Math.floor((a[i]! - zero) / step);
      if (bin < count) counts[bin]! += 1;
    }
  }
  return { lo, step, counts };
}

/**
 * The coincidence peak in a - b within +-`reach`: found by its significance, looked at ever closer until it is some
 * tens of bins wide, then fitted. Null where none stands out or the fit fails.
 */
export function fitDelayPeak(a: Float64Array, b: Float64Array, reach: number): PeakFit | null {
  let lo = -reach;
  let step = (2 * reach) / bins;
  for (let zoom = 0; zoom < mostZooms; zoom += 1) {
    const data = binDifferences(a, b, lo, step, bins);
    const found = findPeak(data);
    if (found === null) return null;
    const isWide = found.width >= 16 * step;
    if (isWide || zoom === mostZooms - 1) {
      const { excess, centre, width, basePerBin } = found;
      return fitPeak(data, { area: excess, centre, sigma: width / 2.5, base: basePerBin });
    }
    lo = found.centre - 16 * found.width;
    step = (32 * found.width) / bins;
  }
  return null;
}
