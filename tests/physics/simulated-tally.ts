import type { PairTally, TagTally } from '../../shared/contracts/tally';
import type { PairCovariance } from '../../shared/physics/double-gaussian';
import type { Random } from '../../shared/util/random';

/**
 * A tag tally with known truth, drawn pair by pair without any tags: both photons by a bivariate normal law along x and
 * y, floored to pixels, lost when either misses its array; accidentals pair unrelated photons of the same singles.
 */
export interface TallyScene {
  size: number;
  slices: number;
  /** Pixel units, the same along x and y. */
  truth: PairCovariance;
  centre: number;
  /** Mean numbers over all slices, before losses at the edges. */
  pairs: number;
  accidentals: number;
  windows: number;
}

const WINDOW_HALF = 10;
const BINS = 400;

export function simulateTally(scene: TallyScene, random: Random): TagTally {
  const { size, slices, truth, centre, windows } = scene;
  const pixels = size * size;
  const prompt = emptyPairs(size, slices);
  const shifted = emptyPairs(size, slices);
  const histogram = new Float64Array(BINS);
  const slope = truth.c / truth.v1;
  const rest = Math.sqrt(truth.v2 - truth.c * slope);
  const s1 = Math.sqrt(truth.v1);
  const s2 = Math.sqrt(truth.v2);
  const pixel = (u: number): number => Math.round(centre + u);
  const single = (sigma: number): [number, number] => [
    pixel(sigma * random.normal()),
    pixel(sigma * random.normal()),
  ];
  for (let s = 0; s < slices; s += 1) {
    for (let k = random.poisson(scene.pairs / slices); k > 0; k -= 1) {
      const ux = s1 * random.normal();
      const uy = s1 * random.normal();
      const a: [number, number] = [pixel(ux), pixel(uy)];
      const b: [number, number] = [
        pixel(slope * ux + rest * random.normal()),
        pixel(slope * uy + rest * random.normal()),
      ];
      if (!addPair(prompt, size, s, a, b)) continue;
      // Peak of sigma 3 ticks in bins of one; the window keeps all of it.
      const bin = Math.round(BINS / 2 + 3 * random.normal());
      histogram[bin] = histogram[bin]! + 1;
    }
    for (let k = random.poisson(scene.accidentals / slices); k > 0; k -= 1) {
      addPair(prompt, size, s, single(s1), single(s2));
    }
    for (let k = random.poisson((scene.accidentals * windows) / slices); k > 0; k -= 1) {
      addPair(shifted, size, s, single(s1), single(s2));
    }
  }
  const perBin = scene.accidentals / (2 * WINDOW_HALF + 1);
  for (let m = 0; m < BINS; m += 1) histogram[m] = histogram[m]! + random.poisson(perBin);
  const singles = (sigma: number): Float64Array => {
    const out = new Float64Array(pixels);
    for (let k = 0; k < 20_000; k += 1) {
      const [x, y] = single(sigma);
      if (x >= 0 && y >= 0 && x < size && y < size) out[y * size + x] = out[y * size + x]! + 1;
    }
    return out;
  };
  const arm = (sigma: number) => {
    const counts = singles(sigma);
    const total = counts.reduce((sum, v) => sum + v, 0);
    return {
      width: size,
      height: size,
      singles: counts,
      singlesPerSlice: new Float64Array(slices).fill(total / slices),
      masked: new Uint8Array(pixels),
    };
  };
  const a = arm(s1);
  const b = arm(s2);
  // As long a run as makes the product of the singles agree with the accidentals.
  const found = shifted.pairs.reduce((sum, v) => sum + v, 0) / windows;
  const product = sumOf(a.singles) * sumOf(b.singles) * (2 * WINDOW_HALF + 1);
  const sliceTick = found > 0 ? Math.ceil(product / found / slices) : 2 ** 20;
  return {
    kind: 'tags',
    tickFs: 1e5,
    records: 400_000,
    tags: 400_000,
    unmapped: 0,
    firstTick: 0n,
    lastTick: BigInt(slices * sliceTick - 1),
    outOfOrder: 0,
    sliceTick,
    firstSlice: 0,
    slices,
    a,
    b,
    histogram: { loTick: -BINS / 2, binTick: 1, counts: histogram },
    window: {
      loTick: -WINDOW_HALF,
      hiTick: WINDOW_HALF,
      shiftsTick: Array.from({ length: windows }, (_, k) => 1000 * (k + 1)),
    },
    prompt,
    shifted,
  };
}

function sumOf(values: Float64Array): number {
  return values.reduce((sum, v) => sum + v, 0);
}

function emptyPairs(size: number, slices: number): PairTally {
  const cells = size * size;
  const lags = (2 * size - 1) ** 2;
  return {
    pairs: new Float64Array(slices),
    jointX: new Float64Array(slices * cells),
    jointY: new Float64Array(slices * cells),
    imageA: new Float64Array(slices * cells),
    imageB: new Float64Array(slices * cells),
    difference: new Float64Array(lags),
    sum: new Float64Array(lags),
    matrix: null,
  };
}

function addPair(
  pairs: PairTally,
  size: number,
  s: number,
  [xa, ya]: readonly [number, number],
  [xb, yb]: readonly [number, number],
): boolean {
  if (Math.min(xa, ya, xb, yb) < 0 || Math.max(xa, ya, xb, yb) >= size) return false;
  const base = s * size * size;
  const wide = 2 * size - 1;
  const add = (map: Float64Array, at: number): void => {
    map[at] = map[at]! + 1;
  };
  add(pairs.pairs, s);
  add(pairs.jointX, base + xb * size + xa);
  add(pairs.jointY, base + yb * size + ya);
  add(pairs.imageA, base + ya * size + xa);
  add(pairs.imageB, base + yb * size + xb);
  add(pairs.difference, (yb - ya + size - 1) * wide + xb - xa + size - 1);
  add(pairs.sum, (ya + yb) * wide + xa + xb);
  return true;
}

/** Mean joint map [x2][x1] of one axis, by fine midpoint sums over every pixel: the truth of raw moments. */
export function meanJoint(scene: TallyScene): Float64Array {
  const { size, truth, centre } = scene;
  const fine = 12;
  const law = (covariance: PairCovariance): Float64Array => {
    const { v1, v2, c } = covariance;
    const det = v1 * v2 - c * c;
    const out = new Float64Array(size * size);
    for (let x2 = 0; x2 < size; x2 += 1) {
      for (let x1 = 0; x1 < size; x1 += 1) {
        let sum = 0;
        for (let a = 0; a < fine; a += 1) {
          for (let b = 0; b < fine; b += 1) {
            const u = x1 - centre + (a + 0.5) / fine - 0.5;
            const v = x2 - centre + (b + 0.5) / fine - 0.5;
            sum += Math.exp(-(v2 * u * u - 2 * c * u * v + v1 * v * v) / (2 * det));
          }
        }
        out[x2 * size + x1] = sum / (fine * fine * 2 * Math.PI * Math.sqrt(det));
      }
    }
    return out;
  };
  const total = (map: Float64Array): number => map.reduce((sum, v) => sum + v, 0);
  const pairs = law(truth);
  const accidentals = law({ ...truth, c: 0 });
  // The other axis must be met as well: a factor common to the map.
  const keptPairs = scene.pairs * total(pairs);
  const keptAccidentals = scene.accidentals * total(accidentals);
  return pairs.map((p, k) => keptPairs * p + keptAccidentals * accidentals[k]!);
}
