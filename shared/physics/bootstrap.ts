import { createRandom } from '../util/random';

/**
 * Block bootstrap over time slices or frame blocks: B draws of n blocks with replacement (Efron & Tibshirani, An
 * Introduction to the Bootstrap, Chapman & Hall 1993, from memory). Catches drift that counting errors miss; needs
 * about 20 blocks, each longer than the source's flicker.
 */

/** resamples * blocks: how often each block was drawn. Rows sum to `blocks`. */
export interface BlockWeights {
  resamples: number;
  blocks: number;
  counts: Uint8Array;
}

export function drawBlockWeights(blocks: number, resamples: number, seed: number): BlockWeights {
  const random = createRandom(seed);
  // A block drawn 256 times out of at most 128 cannot happen, so bytes suffice.
  const counts = new Uint8Array(resamples * blocks);
  for (let r = 0; r < resamples; r += 1) {
    const row = r * blocks;
    for (let k = 0; k < blocks; k += 1) {
      const at = row + random.below(blocks);
      counts[at] = (counts[at] ?? 0) + 1;
    }
  }
  return { resamples, blocks, counts };
}

/** Weighted sums of block rows: out[r][p] = sum_s w[r][s] rows[s][p]. O(resamples * blocks * width). */
export function resampleSums(weights: BlockWeights, rows: Float64Array, width: number): Float64Array {
  const { resamples, blocks, counts } = weights;
  const out = new Float64Array(resamples * width);
  for (let r = 0; r < resamples; r += 1) {
    const target = r * width;
    for (let s = 0; s < blocks; s += 1) {
      const w = counts[r * blocks + s] as number;
      if (w === 0) continue;
      const source = s * width;
      for (let p = 0; p < width; p += 1) {
        out[target + p] = (out[target + p] as number) + w * (rows[source + p] as number);
      }
    }
  }
  return out;
}

export interface Spread {
  /** Standard deviation of the resamples: the 1-sigma standard error. */
  sigma: number;
  /** 2.5 and 97.5 percentiles. */
  interval: [number, number];
  mean: number;
}

/** Share of the resamples that must have a value for their spread to mean anything. */
export const LEAST_FINITE = 0.98;

/**
 * Spread of resampled values. NaN where fewer than two, or fewer than 98 in a hundred, are finite: a quantity that
 * resampling so often makes impossible has no standard error, and leaving those draws out would make it look better.
 */
export function spreadOf(values: Float64Array): Spread {
  const kept = values.filter((v) => Number.isFinite(v)).sort();
  const n = kept.length;
  if (n < 2 || n < LEAST_FINITE * values.length)
    return { sigma: Number.NaN, interval: [Number.NaN, Number.NaN], mean: Number.NaN };
  let mean = 0;
  for (const v of kept) mean += v / n;
  let squares = 0;
  for (const v of kept) squares += (v - mean) ** 2;
  return {
    sigma: Math.sqrt(squares / (n - 1)),
    interval: [percentile(kept, 0.025), percentile(kept, 0.975)],
    mean,
  };
}

/** Linear interpolation between order statistics of an ascending array. */
export function percentile(ascending: Float64Array, fraction: number): number {
  const at = fraction * (ascending.length - 1);
  const low = Math.floor(at);
  const a = ascending[low] ?? Number.NaN;
  const b = ascending[Math.min(low + 1, ascending.length - 1)] ?? Number.NaN;
  return a + (at - low) * (b - a);
}

/**
 * Takes the bootstrap's own bias out: resampling repeats events, which lowers small-sample variances by about 1/n per
 * column. Scaled so that the resamples average to the estimate (Efron & Tibshirani, as above, bias correction).
 */
export function recentre(values: Float64Array, estimate: number): Float64Array {
  const { mean } = spreadOf(values);
  return mean > 0 && estimate > 0 ? values.map((v) => (v * estimate) / mean) : values;
}
