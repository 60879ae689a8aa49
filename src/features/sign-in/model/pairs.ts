import { createRandom } from '../../../../shared/util/random';

/** Where the two photons of a pair meet their arms, in units of the beam's 1-sigma width. */
export interface Pair {
  signal: number;
  idler: number;
}

/** Simulated far-field pairs: opposite momenta up to `blur`, Gaussian in both coordinates. Same seed, same picture. */
export function simulatePairs(count: number, blur: number, seed: number): Pair[] {
  const random = createRandom(seed);
  return Array.from({ length: count }, () => {
    const signal = random.normal();
    return { signal, idler: -signal + blur * random.normal() };
  });
}

/** Counts in equal bins from -edge to edge; what lies outside is left out. */
export function countInBins(values: readonly number[], bins: number, edge: number): number[] {
  const counts = new Array<number>(bins).fill(0);
  for (const value of values) {
    const bin = Math.floor(((value + edge) / (2 * edge)) * bins);
    if (bin >= 0 && bin < bins) counts[bin] = counts[bin]! + 1;
  }
  return counts;
}
