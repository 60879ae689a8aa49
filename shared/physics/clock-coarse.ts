import FFT from 'fft.js';
import { largestNoise, poissonZ } from './find-peak';

/** Clicks of two clocks, each in ps of its own clock. The companion's reach beyond the stretch by the range searched. */
export interface ClockStretch {
  mainPs: Float64Array;
  companionPs: Float64Array;
  /** The stretch of the main clock. */
  fromPs: number;
  toPs: number;
}

/** How far to look, in how fine a grid. */
export interface CoarseSearch {
  /** Main less companion is looked for within +-range. */
  rangePs: number;
  mostDrift: number;
  /** Bins of the correlation, a power of two. */
  size: number;
}

export interface CoarseMatch {
  /** Main minus companion at the middle of the stretch, good to a bin or two. */
  offsetPs: number;
  /** Rate u of main over companion less one, good to a step or two. */
  drift: number;
  binPs: number;
  driftStep: number;
  z: number;
  threshold: number;
}

/** Bins from which noise is judged. */
const judged = 20_000;

/**
 * Offset and relative rate of two free-running clocks by cross-correlation of binned counts. Main clicks are shrunk about
 * the middle by trial rates u = 0, s, -s, 2 s, ... with s T = one bin b, so that a true peak is never smeared over more
 * than two bins; two trials go through one complex transform, as its real and its imaginary part. Sums of one bin and of
 * two neighbours are looked at; pairs at C per second in rates R1 and R2
 * stand out by z = C T / sqrt(R1 R2 b T (1 + R b)): the last factor, R the larger rate, counts where bins hold several clicks. Accepted
 * for z > sqrt(2 ln M) + 5, M all bins of all trials; noise above that of counting (a flickering source) lowers z. The
 * nearest trial with an accepted peak is taken, then the best of its neighbours.
 * Ho, Lamas-Linares & Kurtsiefer, New J. Phys. 11, 045011 (2009), from memory.
 * Cost: two transforms of `size` for every two trials, 0.15 s for 2^20. Null when nothing stands out, or with less than six clicks a side.
 */
export function findCoarseMatch(
  stretch: ClockStretch,
  { rangePs, mostDrift, size }: CoarseSearch,
): CoarseMatch | null {
  const { mainPs, companionPs, fromPs, toPs } = stretch;
  const spanPs = toPs - fromPs;
  if (!(spanPs > 0) || mainPs.length < 6 || companionPs.length < 6) return null;
  const binPs = (spanPs + 2 * rangePs) / (size - 4);
  const lags = Math.floor(rangePs / binPs);
  const driftStep = binPs / spanPs;
  const steps = Math.ceil(mostDrift / driftStep);
  const threshold = largestNoise(2 * (2 * lags + 1) * (2 * steps + 1)) + 5;
  const fft = new FFT(size);
  const bins = { originPs: fromPs - rangePs, binPs, middlePs: (fromPs + toPs) / 2, size };
  const companion = new Float64Array(2 * size);
  addCounts(companion, 0, companionPs, 0, bins);
  const spectrum = new Float64Array(2 * size);
  fft.transform(spectrum, companion);
  const known = new Map<number, Highest>();
  const at = (step: number): Highest => {
    const even = step - (Math.abs(step) % 2);
    if (!known.has(step)) {
      const counts = new Float64Array(2 * size);
      addCounts(counts, 0, mainPs, even * driftStep, bins);
      addCounts(counts, 1, mainPs, (even + 1) * driftStep, bins);
      const correlation = correlate(fft, counts, spectrum);
      known.set(even, highestOf(correlation, 0, lags));
      known.set(even + 1, highestOf(correlation, 1, lags));
    }
    return known.get(step) ?? { z: Number.NEGATIVE_INFINITY, lag: 0 };
  };
  for (let away = 0; away <= steps; away += 1) {
    const first = at(away).z >= at(-away).z ? away : -away;
    if (!(at(first).z > threshold)) continue;
    let best = first;
    for (const step of [first - 2, first - 1, first + 1, first + 2]) if (at(step).z > at(best).z) best = step;
    const { z, lag } = at(best);
    return { offsetPs: -lag * binPs, drift: best * driftStep, binPs, driftStep, z, threshold };
  }
  return null;
}

interface Highest {
  z: number;
  /** Companion bin less main bin. */
  lag: number;
}

interface Bins {
  originPs: number;
  binPs: number;
  middlePs: number;
  size: number;
}

/** Counts of clicks shrunk by 1 + drift about the middle, into the real (0) or imaginary (1) parts. */
function addCounts(into: Float64Array, part: 0 | 1, ps: Float64Array, drift: number, bins: Bins): void {
  const { originPs, binPs, middlePs, size } = bins;
  const scale = 1 / ((1 + drift) * binPs);
  const start = (middlePs - originPs) / binPs;
  for (let i = 0; i < ps.length; i += 1) {
    const bin = Math.floor(start + (ps[i]! - middlePs) * scale);
    if (bin >= 0 && bin < size) into[2 * bin + part]! += 1;
  }
}

/** Sum over i of counts[i] companion[i + k] for every k: the spectrum of counts is taken at minus the frequency. */
function correlate(fft: FFT, counts: Float64Array, companion: Float64Array): Float64Array {
  const { size } = fft;
  const spectrum = new Float64Array(2 * size);
  fft.transform(spectrum, counts);
  for (let f = 0; f < size; f += 1) {
    const mirrored = 2 * ((size - f) % size);
    const [re, im] = [spectrum[mirrored]!, spectrum[mirrored + 1]!];
    const [cRe, cIm] = [companion[2 * f]!, companion[2 * f + 1]!];
    counts[2 * f] = re * cRe - im * cIm;
    counts[2 * f + 1] = re * cIm + im * cRe;
  }
  fft.inverseTransform(spectrum, counts);
  return spectrum;
}

function highestOf(correlation: Float64Array, part: 0 | 1, lags: number): Highest {
  const size = correlation.length / 2;
  const value = (lag: number): number => correlation[2 * ((lag + size) % size) + part]!;
  let single = { count: Number.NEGATIVE_INFINITY, lag: 0 };
  let double = { count: Number.NEGATIVE_INFINITY, lag: 0 };
  let before = value(-lags - 1);
  for (let lag = -lags; lag <= lags; lag += 1) {
    const count = value(lag);
    if (count > single.count) single = { count, lag };
    if (count + before > double.count) double = { count: count + before, lag: lag - 0.5 };
    before = count;
  }
  const { mean, excess } = noiseOf(value, lags);
  // Rounding in the transform may leave a count of none slightly below it.
  const zOf = (count: number, expected: number): number =>
    poissonZ(Math.max(0, count), Math.max(expected, 1e-3)) / excess;
  const [z1, z2] = [zOf(single.count, mean), zOf(double.count, 2 * mean)];
  return z1 >= z2 ? { z: z1, lag: single.lag } : { z: z2, lag: double.lag };
}

/** Mean count of a bin and its scatter over that of counting, from bins spread over the whole range. */
function noiseOf(value: (lag: number) => number, lags: number): { mean: number; excess: number } {
  const hop = Math.max(1, Math.floor((2 * lags + 1) / judged));
  let n = 0;
  let sum = 0;
  let squares = 0;
  for (let lag = -lags; lag <= lags; lag += hop) {
    const count = value(lag);
    n += 1;
    sum += count;
    squares += count * count;
  }
  const mean = Math.max(0, sum / n);
  const variance = Math.max(0, squares / n - mean * mean);
  return { mean, excess: mean > 0 ? Math.max(1, Math.sqrt(variance / mean)) : 1 };
}
