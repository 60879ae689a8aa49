/**
 * Least squares by Levenberg and Marquardt, without allocation, for fits that are made a thousand times.
 *
 * Step: (H + lambda diag H) d = g with H = J^T J, g = J^T (data - model); taken when the sum of squares S does not grow,
 * lambda / 10 then, else lambda * 10 (at least to 1e-3: it begins near Gauss and Newton's step, for warm starts). Ends
 * with an undamped step that promises less than 1e-6 of a variance: it is at most 1e-3 of the parameters' own errors, and
 * what is left after it some 1e-5.
 * Source: Marquardt, J. Soc. Indust. Appl. Math. 11, 431 (1963), from memory. Cost: O(n^3) a step beside `accumulate`.
 */
export interface LeastSquares {
  readonly parameters: number;
  /** Data minus parameters. */
  readonly freedom: number;
  /** Sum of squares of the data about their mean: the scale below which a change is rounding. */
  readonly scale: number;
  /** False where the model has no meaning: such a step is not taken. */
  allows(at: Float64Array): boolean;
  /** Writes H (n * n, both triangles) and g (n) at these parameters; returns S. */
  accumulate(at: Float64Array, h: Float64Array, g: Float64Array): number;
}

export type FitEnd = 'converged' | 'not-finite' | 'singular' | 'no-progress';

const MOST_STEPS = 60;
const MOST_DAMPING = 1e12;
const PROMISE = 1e-6;
/** Rounding of sums over the data, squared against it. */
const ROUNDING = 1e-26;

export class LevenbergMarquardt {
  /** Of the last `fit`: sum of squares before its last small step. */
  sumSquares = 0;
  steps = 0;
  #h: Float64Array;
  #g: Float64Array;
  #hNext: Float64Array;
  #gNext: Float64Array;
  readonly #factor: Float64Array;
  readonly #step: Float64Array;
  readonly #trial: Float64Array;

  constructor(parameters: number) {
    const square = parameters * parameters;
    this.#h = new Float64Array(square);
    this.#hNext = new Float64Array(square);
    this.#factor = new Float64Array(square);
    this.#g = new Float64Array(parameters);
    this.#gNext = new Float64Array(parameters);
    this.#step = new Float64Array(parameters);
    this.#trial = new Float64Array(parameters);
  }

  /** Moves `at` to the minimum. Where the end is not `converged`, `at` is the best point seen. */
  fit(problem: LeastSquares, at: Float64Array): FitEnd {
    const n = problem.parameters;
    const step = this.#step;
    this.steps = 0;
    this.sumSquares = problem.accumulate(at, this.#h, this.#g);
    if (!Number.isFinite(this.sumSquares)) return 'not-finite';
    let damping = 1e-6;
    while (this.steps < MOST_STEPS) {
      this.steps += 1;
      if (!factorise(this.#h, n, 0, this.#factor)) return 'singular';
      solve(this.#factor, this.#g, n, step);
      let promise = 0;
      for (let i = 0; i < n; i++) promise += step[i]! * this.#g[i]!;
      const variance = this.sumSquares / Math.max(1, problem.freedom);
      if (promise <= PROMISE * variance + ROUNDING * problem.scale) {
        for (let i = 0; i < n; i++) this.#trial[i] = at[i]! + step[i]!;
        if (problem.allows(this.#trial)) at.set(this.#trial);
        return 'converged';
      }
      if (!factorise(this.#h, n, damping, this.#factor)) return 'singular';
      solve(this.#factor, this.#g, n, step);
      for (let i = 0; i < n; i++) this.#trial[i] = at[i]! + step[i]!;
      const next = problem.allows(this.#trial)
        ? problem.accumulate(this.#trial, this.#hNext, this.#gNext)
        : Number.POSITIVE_INFINITY;
      // Differences of S below its rounding decide nothing; the step is as good as the point.
      if (next <= this.sumSquares + 1e-14 * problem.scale) {
        at.set(this.#trial);
        this.sumSquares = next;
        [this.#h, this.#hNext] = [this.#hNext, this.#h];
        [this.#g, this.#gNext] = [this.#gNext, this.#g];
        damping /= 10;
      } else {
        damping = Math.max(1e-3, 10 * damping);
        if (!(damping <= MOST_DAMPING)) return 'no-progress';
      }
    }
    return 'no-progress';
  }

  /** Diagonal of H^-1 at the end of the last fit; false when it has none. */
  inverseDiagonal(n: number, into: Float64Array): boolean {
    if (!factorise(this.#h, n, 0, this.#factor)) return false;
    const unit = this.#trial;
    for (let i = 0; i < n; i++) {
      unit.fill(0);
      unit[i] = 1;
      solve(this.#factor, unit, n, this.#step);
      into[i] = this.#step[i]!;
    }
    return true;
  }
}

/** Cholesky factor of h with its diagonal raised by the share `damping`; false unless it is positive beyond rounding. */
function factorise(h: Float64Array, n: number, damping: number, factor: Float64Array): boolean {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = h[i * n + j]!;
      if (i === j) sum *= 1 + damping;
      for (let k = 0; k < j; k++) sum -= factor[i * n + k]! * factor[j * n + k]!;
      if (i !== j) {
        factor[i * n + j] = sum / factor[j * n + j]!;
        continue;
      }
      if (!(sum > 1e-14 * h[i * n + i]!)) return false;
      factor[i * n + i] = Math.sqrt(sum);
    }
  }
  return true;
}

function solve(factor: Float64Array, g: Float64Array, n: number, into: Float64Array): void {
  for (let i = 0; i < n; i++) {
    let sum = g[i]!;
    for (let k = 0; k < i; k++) sum -= factor[i * n + k]! * into[k]!;
    into[i] = sum / factor[i * n + i]!;
  }
  for (let i = n - 1; i >= 0; i--) {
    let sum = into[i]!;
    for (let k = i + 1; k < n; k++) sum -= factor[k * n + i]! * into[k]!;
    into[i] = sum / factor[i * n + i]!;
  }
}
