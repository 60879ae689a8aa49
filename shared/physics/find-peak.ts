import type { BinnedCounts } from './fit-peak';

export interface FoundPeak {
  /** Middle of the most significant stretch, its width and the counts above the base in it. */
  centre: number;
  width: number;
  excess: number;
  /** Flat base in counts per bin, without that stretch. */
  basePerBin: number;
  /** Significance of the excess and what it had to pass, both in sigmas. */
  z: number;
  threshold: number;
}

/** sqrt(2 ln M): about the largest excursion that noise makes among M bins. */
export function largestNoise(trials: number): number {
  return Math.sqrt(2 * Math.log(Math.max(1, trials)));
}

/**
 * Significance of `n` counts where `mean` were expected, sqrt(2 (n ln(n/mean) - n + mean)): the signed root of the
 * Poisson likelihood ratio, which is (n - mean)/sqrt(mean) for large means and does not exaggerate for small ones.
 * Li & Ma, Astrophys. J. 272, 317 (1983), from memory, for known background.
 */
export function poissonZ(n: number, mean: number): number {
  if (n === 0) return -Math.sqrt(2 * mean);
  return Math.sign(n - mean) * Math.sqrt(Math.max(0, 2 * (n * Math.log(n / mean) - n + mean)));
}

/**
 * The most significant stretch of a delay histogram against its flat base, over stretches of 1, 2, 4, ... bins. M
 * counts every stretch looked at, and the peak is accepted only for z > sqrt(2 ln M) + 5 (after Ho, Lamas-Linares &
 * Kurtsiefer, New J. Phys. 11, 045011 (2009), from memory). Below six counts nothing is accepted. Null when nothing
 * stands out. Complexity: bins * log2(bins).
 */
export function findPeak(data: BinnedCounts): FoundPeak | null {
  const bins = data.counts.length;
  const total = new Float64Array(bins + 1);
  for (let m = 0; m < bins; m++) total[m + 1] = total[m]! + data.counts[m]!;
  if (total[bins]! < 6) return null;
  let best: { start: number; size: number; count: number; z: number } | null = null;
  let trials = 0;
  const mean = total[bins]! / bins;
  for (let size = 1; size <= bins / 16; size *= 2) {
    const hop = Math.max(1, size >> 1);
    for (let start = 0; start + size <= bins; start += hop) {
      trials += 1;
      const count = total[start + size]! - total[start]!;
      // Only stretches above the mean can be a peak; the mean includes the peak, so the test is a safe filter.
      if (count <= mean * size) continue;
      const z = poissonZ(count, size * baseWithout(total, start, size));
      if (best === null || z > best.z) best = { start, size, count, z };
    }
  }
  if (best === null) return null;
  const threshold = largestNoise(trials) + 5;
  if (!(best.z > threshold && best.count >= 6)) return null;
  const basePerBin = baseWithout(total, best.start, best.size);
  return {
    centre: data.lo + (best.start + best.size / 2) * data.step,
    width: best.size * data.step,
    excess: best.count - basePerBin * best.size,
    basePerBin,
    z: best.z,
    threshold,
  };
}

/** Counts per bin outside three times the stretch; half a count in all when there are none there. */
function baseWithout(total: Float64Array, start: number, size: number): number {
  const bins = total.length - 1;
  const from = Math.max(0, start - size);
  const to = Math.min(bins, start + 2 * size);
  const outside = total[bins]! - (total[to]! - total[from]!);
  return Math.max(0.5, outside) / Math.max(1, bins - (to - from));
}
