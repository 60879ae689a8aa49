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

/** Bins among which the base of a peak and its noise are judged. */
const blockBins = 256;

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

/** The best bin or pair of neighbours, each against the bins around it, so that short files may have a sloping base. */
function highestOf(correlation: Float64Array, part: 0 | 1, lags: number): Highest {
  const size = correlation.length / 2;
  // Rounding in the transform may leave a count of none slightly below it.
  const value = (lag: number): number => Math.max(0, correlation[2 * ((lag + size) % size) + part]!);
  const blocks: BlockHighest[] = [];
  for (let from = -lags; from + blockBins <= lags; from += blockBins) blocks.push(highestIn(value, from));
  const excesses = Float64Array.from(blocks, ({ excess }) => excess).sort();
  const excess = Math.max(1, excesses[excesses.length >> 1] ?? 1);
  let best: Highest = { z: Number.NEGATIVE_INFINITY, lag: 0 };
  for (const { single, double, at, mean } of blocks) {
    const z1 = poissonZ(single, mean) / excess;
    const z2 = poissonZ(double, 2 * mean) / excess;
    if (z1 > best.z) best = { z: z1, lag: at };
    if (z2 > best.z) best = { z: z2, lag: at + (value(at + 1) >= value(at - 1) ? 0.5 : -0.5) };
  }
  return best;
}

interface BlockHighest {
  /** Counts of the highest bin and of it with its higher neighbour. */
  single: number;
  double: number;
  at: number;
  /** Of the other bins of the block: mean, and scatter over that of counting. */
  mean: number;
  excess: number;
}

function highestIn(value: (lag: number) => number, from: number): BlockHighest {
  let at = from;
  let sum = 0;
  let squares = 0;
  for (let lag = from; lag < from + blockBins; lag += 1) {
    const count = value(lag);
    if (count > value(at)) at = lag;
    sum += count;
    squares += count * count;
  }
  let bins = blockBins;
  for (let lag = Math.max(from, at - 2); lag <= Math.min(from + blockBins - 1, at + 2); lag += 1) {
    bins -= 1;
    sum -= value(lag);
    squares -= value(lag) ** 2;
  }
  const single = value(at);
  const variance = Math.max(0, squares / bins - (sum / bins) ** 2);
  return {
    single,
    double: single + Math.max(value(at - 1), value(at + 1)),
    at,
    // One count more than was seen: an empty block does not make a single pair significant.
    mean: (sum + 1) / bins,
    excess: sum > 0 ? Math.sqrt((variance * bins) / sum) : 1,
  };
}
