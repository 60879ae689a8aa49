/**
 * All-pairs delay histogram of two sorted lists, tau = tB - tA; bin m covers [lo + m*bin, lo + (m+1)*bin), as many
 * bins as `out` has. Adds to `out`. Two pointers, O(nA + nB + pairs). This is the plain form of the counting that
 * `tag-scan` does on a merged stream; unlike a start-stop histogram it may be normalised to g2.
 * Empty lists add nothing. Whole ticks below 2^53, or any doubles when an edge may fall either way.
 */
export function delayHistogram(
  timeA: ArrayLike<number>,
  timeB: ArrayLike<number>,
  lo: number,
  bin: number,
  out: Float64Array,
): void {
  const span = out.length * bin;
  let low = 0;
  for (let i = 0; i < timeA.length; i++) {
    const start = timeA[i]! + lo;
    while (low < timeB.length && timeB[low]! < start) low += 1;
    for (let j = low; j < timeB.length; j++) {
      const from = timeB[j]! - start;
      if (!(from < span)) break;
      out[Math.floor(from / bin)]! += 1;
    }
  }
}
