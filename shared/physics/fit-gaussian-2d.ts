import { TiltedGaussian, UprightGaussian } from './gaussian-surface';
import { type FitEnd, LevenbergMarquardt } from './least-squares';

/**
 * Least-squares fit of a two-dimensional Gaussian on a constant to a map, every cell weighing the same. Made for the
 * bootstrap: one fitter takes a thousand maps of one size without allocating, each from the fit of the whole.
 *
 * Errors are from s^2 (J^T J)^-1 with s^2 = S / (cells - parameters): right where the noise is the same everywhere and
 * independent; elsewhere the bootstrap around it is what to quote.
 * Cost at 64 x 64: some 25 us a step upright, 15 times as much tilted; about 4 steps from a warm start.
 */
export interface Gaussian2d {
  amplitude: number;
  /** In cells, from the centre of cell (0, 0). */
  x: number;
  y: number;
  /** Marginal standard deviations, cells. */
  sigmaX: number;
  sigmaY: number;
  offset: number;
  /** Correlation of x and y; 0 for an upright fit. */
  rho: number;
}

export type Gaussian2dFit =
  | {
      end: 'converged';
      peak: Gaussian2d;
      /** Standard errors; that of `rho` is 0 for an upright fit. */
      errors: Gaussian2d;
      sumSquares: number;
      freedom: number;
      steps: number;
    }
  /** `outside`: a minimum whose centre the map does not hold. `peak` is where the fit stood, not a result. */
  | { end: Exclude<FitEnd, 'converged'> | 'outside'; peak: Gaussian2d };

export class Gaussian2dFitter {
  readonly #surface: UprightGaussian | TiltedGaussian;
  readonly #solver: LevenbergMarquardt;
  readonly #at: Float64Array;
  readonly #variance: Float64Array;

  /** `leftOut`: cells (y * width + x) that do not count, each once. */
  constructor(
    width: number,
    height: number,
    { tilted = false, leftOut = new Int32Array(0) }: { tilted?: boolean; leftOut?: Int32Array } = {},
  ) {
    this.#surface = tilted
      ? new TiltedGaussian(width, height, leftOut)
      : new UprightGaussian(width, height, leftOut);
    this.#solver = new LevenbergMarquardt(this.#surface.parameters);
    this.#at = new Float64Array(this.#surface.parameters);
    this.#variance = new Float64Array(this.#surface.parameters);
  }

  /** Fits `width * height` values of `map` from index `from` on. */
  fit(map: Float64Array | Float32Array, start: Gaussian2d, from = 0): Gaussian2dFit {
    const surface = this.#surface;
    const at = this.#at;
    surface.load(map, from);
    write(at, start, surface.mean);
    if (!surface.allows(at) || surface.freedom < 1) return { end: 'no-progress', peak: start };
    const end = this.#solver.fit(surface, at);
    const peak = read(at, surface.mean);
    if (end !== 'converged') return { end, peak };
    const inside = peak.x > -1 && peak.x < surface.width && peak.y > -1 && peak.y < surface.height;
    if (!inside) return { end: 'outside', peak };
    if (!this.#solver.inverseDiagonal(surface.parameters, this.#variance)) return { end: 'singular', peak };
    const { sumSquares, steps } = this.#solver;
    const { freedom } = surface;
    for (let i = 0; i < at.length; i++) {
      at[i] = Math.sqrt((this.#variance[i]! * sumSquares) / freedom);
    }
    return { end, peak, errors: read(at, 0), sumSquares, freedom, steps };
  }
}

function write(at: Float64Array, peak: Gaussian2d, mean: number): void {
  at[0] = peak.amplitude;
  at[1] = peak.x;
  at[2] = peak.y;
  at[3] = peak.sigmaX;
  at[4] = peak.sigmaY;
  at[5] = peak.offset - mean;
  if (at.length > 6) at[6] = peak.rho;
}

function read(at: Float64Array, mean: number): Gaussian2d {
  return {
    amplitude: at[0]!,
    x: at[1]!,
    y: at[2]!,
    sigmaX: at[3]!,
    sigmaY: at[4]!,
    offset: at[5]! + mean,
    rho: at.length > 6 ? at[6]! : 0,
  };
}
