import type { PairCovariance } from '../../shared/physics/double-gaussian';
import type { PairFitInput } from '../../shared/physics/fit-pair';
import type { Random } from '../../shared/util/random';

/** Joint counts with known truth: pairs of a bivariate normal law, floored to pixels, on uncorrelated accidentals. */
export interface JointScene {
  n1: number;
  n2: number;
  slices: number;
  /** Pixel units, of the continuous coordinates. */
  truth: PairCovariance;
  centre1: number;
  centre2: number;
  /** Mean numbers over all slices. */
  pairs: number;
  accidentals: number;
  windows: number;
  /** Share of the singles that is flat over the array (darks). */
  flat: number;
}

/** Pixel i covers [i - 1/2, i + 1/2); a pair counts when both photons meet the array. */
export function simulateJoint(scene: JointScene, random: Random): PairFitInput {
  const { n1, n2, slices, truth, windows } = scene;
  const cells = n1 * n2;
  const prompt = new Float64Array(slices * cells);
  const shifted = new Float64Array(slices * cells);
  const slope = truth.c / truth.v1;
  const rest = Math.sqrt(truth.v2 - truth.c * slope);
  const single1 = (): number =>
    random.uniform() < scene.flat
      ? random.below(n1)
      : Math.round(scene.centre1 + Math.sqrt(truth.v1) * random.normal());
  const single2 = (): number =>
    random.uniform() < scene.flat
      ? random.below(n2)
      : Math.round(scene.centre2 + Math.sqrt(truth.v2) * random.normal());
  const add = (map: Float64Array, s: number, x1: number, x2: number): void => {
    if (x1 < 0 || x2 < 0 || x1 >= n1 || x2 >= n2) return;
    const at = s * cells + x2 * n1 + x1;
    map[at] = map[at]! + 1;
  };
  for (let s = 0; s < slices; s += 1) {
    for (let k = random.poisson(scene.pairs / slices); k > 0; k -= 1) {
      const u1 = Math.sqrt(truth.v1) * random.normal();
      const u2 = slope * u1 + rest * random.normal();
      add(prompt, s, Math.round(scene.centre1 + u1), Math.round(scene.centre2 + u2));
    }
    for (let k = random.poisson(scene.accidentals / slices); k > 0; k -= 1)
      add(prompt, s, single1(), single2());
    for (let k = random.poisson((scene.accidentals * windows) / slices); k > 0; k -= 1) {
      add(shifted, s, single1(), single2());
    }
  }
  const singles1 = new Float64Array(n1);
  const singles2 = new Float64Array(n2);
  for (let k = 0; k < 100_000; k += 1) {
    const x1 = single1();
    const x2 = single2();
    if (x1 >= 0 && x1 < n1) singles1[x1] = singles1[x1]! + 1;
    if (x2 >= 0 && x2 < n2) singles2[x2] = singles2[x2]! + 1;
  }
  return {
    n1,
    n2,
    slices,
    prompt,
    shifted,
    windows,
    singles1,
    singles2,
    open1: new Float64Array(n1).fill(1),
    open2: new Float64Array(n2).fill(1),
  };
}
