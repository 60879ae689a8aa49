import type { CoarseSearch } from '../../shared/physics/clock-coarse';
import type { ClockFile } from '../../shared/physics/clock-match';
import { createRandom } from '../../shared/util/random';

export interface ClockTruth {
  seconds: number;
  /** Clicks per second of main and companion, pairs included. */
  rates: readonly [number, number];
  pairs: number;
  /** t_main = t_companion (1 + drift) + offset. */
  offsetPs: number;
  drift: number;
  jitterPs: number;
  /** Amplitude of a slow swing that no straight line follows. */
  wanderPs?: number;
}

/** A small range searched, so that a test takes tenths of a second. */
export const quickSearches: readonly (CoarseSearch & { spanPs: number })[] = [
  { rangePs: 0.1e12, spanPs: 2e12, mostDrift: 1.2e-4, size: 2 ** 17 },
];

/** Clicks of two clocks in ps, each as its own clock shows them. */
export function simulateClocks(
  { seconds, rates, pairs, offsetPs, drift, jitterPs, wanderPs = 0 }: ClockTruth,
  seed: number,
): { main: Float64Array; companion: Float64Array } {
  const random = createRandom(seed);
  const spanPs = seconds * 1e12;
  const main: number[] = [];
  const companion: number[] = [];
  const poisson = (rate: number, happen: (ps: number) => void): void => {
    if (!(rate > 0)) return;
    for (
      let t = (random.exponential() * 1e12) / rate;
      t < spanPs;
      t += (random.exponential() * 1e12) / rate
    ) {
      happen(t);
    }
  };
  const seen = (ps: number): number =>
    Math.round((ps - offsetPs + wanderPs * Math.sin((2 * Math.PI * ps) / spanPs)) / (1 + drift));
  poisson(rates[0] - pairs, (t) => main.push(Math.round(t)));
  poisson(rates[1] - pairs, (t) => companion.push(seen(t)));
  poisson(pairs, (t) => {
    main.push(Math.round(t + jitterPs * random.normal()));
    companion.push(seen(t + jitterPs * random.normal()));
  });
  return { main: Float64Array.from(main).sort(), companion: Float64Array.from(companion).sort() };
}

export function clockFile(clicks: Float64Array): ClockFile {
  const first = clicks[0]!;
  const since = clicks.map((ps) => ps - first);
  return {
    spanPs: since.at(-1)!,
    read: async (from, to) => since.slice(firstAtLeast(since, from), firstAtLeast(since, to)),
  };
}

function firstAtLeast(values: Float64Array, least: number): number {
  let [low, high] = [0, values.length];
  while (low < high) {
    const middle = (low + high) >> 1;
    if (values[middle]! < least) low = middle + 1;
    else high = middle;
  }
  return low;
}
