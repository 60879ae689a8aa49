import { describe, expect, it } from 'vitest';
import { type Gaussian2d, type Gaussian2dFit, Gaussian2dFitter } from '../../shared/physics/fit-gaussian-2d';
import { createRandom } from '../../shared/util/random';
import { seedStatistics } from '../support/seed-statistics';

const [W, H] = [24, 20];
const names = ['amplitude', 'x', 'y', 'sigmaX', 'sigmaY', 'offset', 'rho'] as const;
const peakOf = (values: readonly number[]): Gaussian2d => {
  const [amplitude, x, y, sigmaX, sigmaY, offset, rho = 0] = values as [
    number,
    number,
    number,
    number,
    number,
    number,
  ];
  return { amplitude, x, y, sigmaX, sigmaY, offset, rho };
};

function surface(peak: Gaussian2d, width = W, height = H): Float64Array {
  return Float64Array.from({ length: width * height }, (_, i) => {
    const u = ((i % width) - peak.x) / peak.sigmaX;
    const v = (Math.floor(i / width) - peak.y) / peak.sigmaY;
    const q = (u * u - 2 * peak.rho * u * v + v * v) / (1 - peak.rho ** 2);
    return peak.amplitude * Math.exp(-q / 2) + peak.offset;
  });
}

const made = peakOf([50, 11.3, 9.2, 2.6, 3.4, 4]);
const near = peakOf([40, 11, 9, 2, 3, 0, 0.1]);

/** Noise both sides can make exactly: 10 * (((i * 7919 + 13) % 101) / 101 - 0.5). */
function noisy(peak: Gaussian2d): Float64Array {
  return surface(peak).map((value, i) => value + 10 * (((i * 7919 + 13) % 101) / 101 - 0.5));
}

function converged(fit: Gaussian2dFit): Extract<Gaussian2dFit, { end: 'converged' }> {
  if (fit.end !== 'converged') throw new Error(`The fit ended ${fit.end}.`);
  return fit;
}

/**
 * scipy.optimize.curve_fit (SciPy 1.10.1, NumPy 1.24.2) on the same map, unweighted, xtol = ftol = gtol = 1e-15:
 *   curve_fit(f, None, data[keep], p0=(40, 11, 9, 2, 3, 0[, 0.1]), ...); errors sqrt(diag(cov)).
 */
const scipy = {
  upright: {
    values: [49.98664841, 11.29371921, 9.212269081, 2.607430184, 3.408555527, 3.923271005],
    errors: [0.77744347, 0.040527902, 0.052996122, 0.04457232, 0.057834624, 0.17845309],
  },
  leftOut: {
    values: [50.01174972, 11.29092532, 9.212142251, 2.604848818, 3.405845712, 3.938705951],
    errors: [0.83517291, 0.040641957, 0.053014496, 0.045447299, 0.059147751, 0.17933041],
  },
  tilted: {
    values: [49.98449966, 11.29733644, 9.211255849, 2.609502441, 3.411985566, 3.920503169, 0.4015640038],
    errors: [0.812492, 0.042392728, 0.055443875, 0.045990769, 0.059836522, 0.17290941, 0.019278738],
  },
};

function expectLike(fit: Gaussian2dFit, { values, errors }: { values: number[]; errors: number[] }): void {
  const found = converged(fit);
  values.forEach((value, i) => {
    const name = names[i]!;
    // SciPy takes its derivatives by differences; its errors hold to some 1e-6.
    expect(Math.abs(found.peak[name] - value) / errors[i]!, name).toBeLessThan(1e-4);
    expect(Math.abs(found.errors[name] / errors[i]! - 1), `error of ${name}`).toBeLessThan(1e-5);
  });
}

describe('least-squares fit of a Gaussian surface', () => {
  it('agrees with SciPy: upright, with cells left out, and tilted', () => {
    const leftOut = Int32Array.of(9 * W + 11, 9 * W + 12, 0);
    expectLike(new Gaussian2dFitter(W, H).fit(noisy(made), near), scipy.upright);
    const map = noisy(made);
    for (const cell of leftOut) map[cell] = Number.NaN;
    expectLike(new Gaussian2dFitter(W, H, { leftOut }).fit(map, near), scipy.leftOut);
    const tilted = noisy({ ...made, rho: 0.4 });
    expectLike(new Gaussian2dFitter(W, H, { tilted: true }).fit(tilted, near), scipy.tilted);
    const tiltedOut = new Gaussian2dFitter(W, H, { tilted: true, leftOut }).fit(map, near);
    expect(converged(tiltedOut).freedom).toBe(W * H - 3 - 7);
  });

  it('finds an exact surface again, on a pedestal a million times as high, from far away, and anywhere in an array', () => {
    const high = { ...made, offset: 5e7 };
    const maps = new Float64Array(3 * W * H);
    maps.set(surface(high), W * H);
    const fitter = new Gaussian2dFitter(W, H);
    const fit = converged(fitter.fit(maps, { ...near, x: 15, sigmaX: 5, offset: 5e7 }, W * H));
    // A pedestal of 5e7 leaves 7e-9 of the values.
    for (const name of names) expect(fit.peak[name], name).toBeCloseTo(high[name], 6);
    const odd = { ...made, sigmaY: 1.2, y: 4 };
    const small = converged(new Gaussian2dFitter(W, 9).fit(Float32Array.from(surface(odd, W, 9)), near));
    for (const name of names) expect(small.peak[name], name).toBeCloseTo(odd[name], 5);
  });

  it('says so where there is nothing to fit', () => {
    const fitter = new Gaussian2dFitter(W, H);
    const flat = fitter.fit(new Float64Array(W * H).fill(3), near);
    expect(flat.end).not.toBe('converged');
    const hole = noisy(made);
    hole[7] = Number.NaN;
    expect(fitter.fit(hole, near).end).toBe('not-finite');
    hole[7] = Number.POSITIVE_INFINITY;
    expect(fitter.fit(hole, near).end).toBe('not-finite');
    expect(fitter.fit(noisy(made), { ...near, sigmaX: 0 }).end).toBe('no-progress');
    expect(fitter.fit(noisy(made), { ...near, x: Number.NaN }).end).toBe('not-finite');
    const slope = Float64Array.from({ length: W * H }, (_, i) => i % W);
    const found = fitter.fit(slope, near);
    if (found.end === 'converged') expect(Object.values(found.errors).every(Number.isFinite)).toBe(true);
    expect(new Gaussian2dFitter(2, 2).fit(new Float64Array(4), near).end).toBe('no-progress');
  });

  it.each([
    [
      'even noise',
      400,
      (value: number, random: ReturnType<typeof createRandom>) => value + 4 * random.normal(),
    ],
    // On a pedestal of 400 the noise of counts is nearly even, as the errors assume.
    ['counts', 200, (value: number, random: ReturnType<typeof createRandom>) => random.poisson(value + 396)],
  ])('is unbiased with honest errors over many seeds: %s', (_what, seeds, measure) => {
    const ideal = surface(made);
    const fitter = new Gaussian2dFitter(W, H);
    const fits = Array.from({ length: seeds }, (_, seed) => {
      const random = createRandom(1000 + seed);
      return converged(
        fitter.fit(
          ideal.map((value) => measure(value, random)),
          made,
        ),
      );
    });
    for (const name of ['x', 'y', 'sigmaX', 'sigmaY'] as const) {
      const { bias, coverage } = seedStatistics(
        fits.map(({ peak, errors }) => ({ value: peak[name], sigma: errors[name], truth: made[name] })),
      );
      expect(Math.abs(bias), name).toBeLessThan(3.5);
      // 68.3 %, known to sqrt(0.683 * 0.317 / seeds).
      expect(Math.abs(coverage - 0.683), name).toBeLessThan(3.5 * Math.sqrt(0.217 / seeds));
    }
  });
});
