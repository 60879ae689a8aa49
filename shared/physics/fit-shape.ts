import { inverse, Matrix } from 'ml-matrix';
import {
  type CellGrid,
  type CellNodes,
  type CellValues,
  createCellValues,
  evaluateCells,
  type PeakShape,
} from './gaussian-cells';

/**
 * Fit of lambda = A e g(shape) + B b to the cells of a map: g the cell-averaged Gaussian, e a known efficiency or
 * envelope, b a known background shape. Poisson maximum likelihood for counts, chi^2 for covariance maps. Fisher scoring
 * with Levenberg damping (Bevington & Robinson, Data Reduction and Error Analysis, from memory). Parameters in order:
 * A, mx, my, xx, xy, yy, B; the last two groups may be held.
 */
export interface ShapeProblem {
  grid: CellGrid;
  nodes: CellNodes;
  data: Float64Array;
  /** 1 where the cell counts. */
  use: Uint8Array;
  /** e; null where it is 1 everywhere. */
  envelope: Float64Array | null;
  /** b. */
  background: Float64Array;
  /** False holds A at its start. */
  freeAmplitude: boolean;
  /** Held when `freeBackground` is false. */
  backgroundAmplitude: number;
  freeBackground: boolean;
  /** Symmetric peaks: the centre is known. */
  freeCentre: boolean;
  /** Per-cell variance; null for counts (Poisson). */
  variance: Float64Array | null;
  start: { amplitude: number; shape: PeakShape };
  /** Fits that narrow below this are stopped there: cell^2. */
  leastVariance: number;
}

export interface ShapeFit {
  amplitude: number;
  shape: PeakShape;
  background: number;
  model: Float64Array;
  /** A e g of every cell without the background, and A g. */
  peak: Float64Array;
  bare: Float64Array;
  /** Indices of the free parameters, and the inverse Fisher matrix over them (row-major). */
  free: number[];
  covariance: Float64Array;
  /** Row p: derivative of the model by free parameter p over its variance; the score is linear in the data. */
  scoreRows: Float64Array[];
  /** Fall of the scores per unit of a held background amplitude, and of a held A. */
  backgroundCoupling: Float64Array;
  amplitudeCoupling: Float64Array;
  converged: boolean;
  /** At a minimum that the data determine. A fit along a flat valley converges and is not. */
  settled: boolean;
  /** The narrow axis ended at `leastVariance`. */
  atFloor: boolean;
  /** Minus twice the log-likelihood up to a constant, or chi^2. */
  objective: number;
}

export const FIT_PARAMETERS = 7;
const INDEX = { amplitude: 0, mx: 1, my: 2, xx: 3, xy: 4, yy: 5, background: 6 } as const;
const MAX_STEPS = 60;

interface State {
  params: Float64Array;
  values: CellValues;
  objective: number;
}

export function fitShape(problem: ShapeProblem): ShapeFit {
  const { start } = problem;
  const free: number[] = [INDEX.xx, INDEX.xy, INDEX.yy];
  if (problem.freeAmplitude) free.push(INDEX.amplitude);
  if (problem.freeCentre) free.push(INDEX.mx, INDEX.my);
  if (problem.freeBackground) free.push(INDEX.background);
  free.sort((a, b) => a - b);
  const { shape } = start;
  let state = evaluateAt(
    problem,
    Float64Array.of(
      start.amplitude,
      shape.mx,
      shape.my,
      shape.xx,
      shape.xy,
      shape.yy,
      problem.backgroundAmplitude,
    ),
    createCellValues(problem.grid),
  );
  let spare = createCellValues(problem.grid);
  let damping = 1e-3;
  let converged = false;
  for (let step = 0; step < MAX_STEPS && !converged; step += 1) {
    const { fisher, score } = normalEquations(problem, state, free);
    let accepted = false;
    while (!accepted && damping < 1e8) {
      const delta = solveDamped(fisher, score, damping);
      const next = Float64Array.from(state.params);
      free.forEach((p, k) => {
        next[p] = (next[p] as number) + (delta[k] as number);
      });
      keepPossible(next, problem);
      const trial = withinReach(next, problem.grid) ? evaluateAt(problem, next, spare) : null;
      if (trial !== null && trial.objective <= state.objective) {
        const gain = state.objective - trial.objective;
        spare = state.values;
        state = trial;
        accepted = true;
        damping = Math.max(damping / 10, 1e-9);
        // The objective is in units of chi^2: 1e-6 of it is a thousandth of a standard error.
        converged = gain < 1e-6 && damping < 1e-2;
      } else damping *= 10;
    }
    if (!accepted) break;
  }
  return report(problem, state, free, converged);
}

function evaluateAt(problem: ShapeProblem, params: Float64Array, values: CellValues): State {
  evaluateCells(shapeOf(params), problem.grid, problem.nodes, values);
  const { data, use, variance } = problem;
  let objective = 0;
  for (let c = 0; c < data.length; c += 1) {
    if (use[c] !== 1) continue;
    const n = data[c] as number;
    const model = modelAt(problem, params, values, c);
    if (variance === null) {
      objective += 2 * (model - n);
      if (n > 0) objective += 2 * n * Math.log(n / model);
    } else objective += (n - model) ** 2 / (variance[c] as number);
  }
  return { params, values, objective: Number.isNaN(objective) ? Number.POSITIVE_INFINITY : objective };
}

/** Counts need a model above zero even where neither peak nor background reaches. */
const LEAST_MEAN = 1e-12;

function modelAt(problem: ShapeProblem, params: Float64Array, values: CellValues, c: number): number {
  const e = problem.envelope === null ? 1 : (problem.envelope[c] as number);
  const model =
    (params[INDEX.amplitude] as number) * e * (values.value[c] as number) +
    (params[INDEX.background] as number) * (problem.background[c] as number);
  return problem.variance === null ? Math.max(model, LEAST_MEAN) : model;
}

function shapeOf(p: Float64Array): PeakShape {
  return {
    mx: p[INDEX.mx] as number,
    my: p[INDEX.my] as number,
    xx: p[INDEX.xx] as number,
    xy: p[INDEX.xy] as number,
    yy: p[INDEX.yy] as number,
  };
}

/** Derivatives of the model by the free parameters, one column each; zero where the cell does not count. */
function slopeColumns(problem: ShapeProblem, state: State, free: readonly number[]): Float64Array[] {
  const { background, envelope, use } = problem;
  const { value, derivative } = state.values;
  const cells = use.length;
  const amplitude = state.params[INDEX.amplitude] as number;
  return free.map((p) => {
    const column = new Float64Array(cells);
    for (let c = 0; c < cells; c += 1) {
      if (use[c] !== 1) continue;
      if (p === INDEX.background) {
        column[c] = background[c] as number;
        continue;
      }
      const e = envelope === null ? 1 : (envelope[c] as number);
      column[c] =
        p === INDEX.amplitude
          ? e * (value[c] as number)
          : amplitude * e * (derivative[(p - 1) * cells + c] as number);
    }
    return column;
  });
}

/** 1 / variance of every cell that counts (1 / model for counts), and data - model. */
function weightsOf(problem: ShapeProblem, state: State): { weight: Float64Array; residual: Float64Array } {
  const { data, use, variance } = problem;
  const weight = new Float64Array(data.length);
  const residual = new Float64Array(data.length);
  for (let c = 0; c < data.length; c += 1) {
    if (use[c] !== 1) continue;
    const model = modelAt(problem, state.params, state.values, c);
    weight[c] = 1 / (variance === null ? model : (variance[c] as number));
    residual[c] = (data[c] as number) - model;
  }
  return { weight, residual };
}

function normalEquations(
  problem: ShapeProblem,
  state: State,
  free: readonly number[],
): { fisher: Matrix; score: Float64Array } {
  const columns = slopeColumns(problem, state, free);
  const { weight, residual } = weightsOf(problem, state);
  const k = free.length;
  const fisher = Matrix.zeros(k, k);
  const score = new Float64Array(k);
  const weighted = new Float64Array(weight.length);
  for (let a = 0; a < k; a += 1) {
    const column = columns[a] as Float64Array;
    for (let c = 0; c < weighted.length; c += 1) weighted[c] = (column[c] as number) * (weight[c] as number);
    score[a] = dot(weighted, residual);
    for (let b = 0; b <= a; b += 1) {
      const value = dot(weighted, columns[b] as Float64Array);
      fisher.set(a, b, value);
      fisher.set(b, a, value);
    }
  }
  return { fisher, score };
}

function dot(a: Float64Array, b: Float64Array): number {
  let out = 0;
  for (let c = 0; c < a.length; c += 1) out += (a[c] as number) * (b[c] as number);
  return out;
}

/** Scaled to a unit diagonal first: amplitude and widths differ by orders of magnitude. */
function invertScaled(fisher: Matrix, damping: number): Matrix {
  const k = fisher.rows;
  const scale = Array.from({ length: k }, (_, a) => 1 / Math.sqrt(Math.max(fisher.get(a, a), 1e-300)));
  const unit = Matrix.zeros(k, k);
  for (let a = 0; a < k; a += 1) {
    for (let b = 0; b < k; b += 1) {
      unit.set(a, b, fisher.get(a, b) * (scale[a] as number) * (scale[b] as number));
    }
    unit.set(a, a, 1 + damping);
  }
  const inverted = inverse(unit, true);
  for (let a = 0; a < k; a += 1) {
    for (let b = 0; b < k; b += 1) {
      inverted.set(a, b, inverted.get(a, b) * (scale[a] as number) * (scale[b] as number));
    }
  }
  return inverted;
}

function solveDamped(fisher: Matrix, score: Float64Array, damping: number): Float64Array {
  const inverted = invertScaled(fisher, damping);
  return Float64Array.from(score, (_, a) => score.reduce((sum, s, b) => sum + s * inverted.get(a, b), 0));
}

/** Lifts the covariance's smaller eigenvalue to the floor along its own axis; the amplitude of counts stays above 0. */
function keepPossible(p: Float64Array, problem: ShapeProblem): void {
  if (problem.variance === null) p[INDEX.amplitude] = Math.max(p[INDEX.amplitude] as number, 1e-6);
  const { xx, xy, yy } = shapeOf(p);
  const mean = (xx + yy) / 2;
  const half = Math.hypot((xx - yy) / 2, xy);
  const floor = problem.leastVariance;
  const low = Math.max(mean - half, floor);
  const high = Math.max(mean + half, floor);
  if (mean - half >= floor) return;
  const cos = half > 0 ? (xx - yy) / 2 / half : 0;
  const sin = half > 0 ? xy / half : 0;
  p[INDEX.xx] = (low + high) / 2 + ((high - low) / 2) * cos;
  p[INDEX.yy] = (low + high) / 2 - ((high - low) / 2) * cos;
  p[INDEX.xy] = ((high - low) / 2) * sin;
}

/** A centre off the map or a width beyond twice its size means the step was too long, not that the peak is there. */
function withinReach(p: Float64Array, grid: CellGrid): boolean {
  const { mx, my, xx, yy } = shapeOf(p);
  return (
    Math.abs(mx - grid.x0 - grid.nx / 2) < grid.nx &&
    Math.abs(my - grid.y0 - grid.ny / 2) < grid.ny &&
    xx < 4 * grid.nx * grid.nx &&
    yy < 4 * grid.ny * grid.ny
  );
}

function report(problem: ShapeProblem, state: State, free: number[], converged: boolean): ShapeFit {
  const { data, background } = problem;
  const k = free.length;
  const { fisher, score } = normalEquations(problem, state, free);
  const inverted = invertScaled(fisher, 0);
  const covariance = new Float64Array(k * k);
  for (let a = 0; a < k; a += 1) for (let b = 0; b < k; b += 1) covariance[a * k + b] = inverted.get(a, b);
  const model = new Float64Array(data.length);
  const peak = new Float64Array(data.length);
  const amplitude = state.params[INDEX.amplitude] as number;
  const bare = state.values.value.map((g) => amplitude * g);
  for (let c = 0; c < data.length; c += 1) {
    model[c] = modelAt(problem, state.params, state.values, c);
    peak[c] = (bare[c] as number) * (problem.envelope === null ? 1 : (problem.envelope[c] as number));
  }
  const { weight } = weightsOf(problem, state);
  const scoreRows = slopeColumns(problem, state, free);
  for (const row of scoreRows)
    row.forEach((v, c) => {
      row[c] = v * (weight[c] as number);
    });
  const backgroundCoupling = Float64Array.from(scoreRows, (row) => dot(row, background));
  const amplitudeCoupling = Float64Array.from(scoreRows, (row) => dot(row, peak) / amplitude);
  const shape = shapeOf(state.params);
  const narrow = (shape.xx + shape.yy) / 2 - Math.hypot((shape.xx - shape.yy) / 2, shape.xy);
  return {
    amplitude,
    shape,
    background: state.params[INDEX.background] as number,
    model,
    peak,
    bare,
    free,
    covariance,
    scoreRows,
    backgroundCoupling,
    amplitudeCoupling,
    converged,
    settled: converged && isDetermined(fisher, inverted) && isAtRest(inverted, score),
    atFloor: narrow <= problem.leastVariance * 1.001,
    objective: state.objective,
  };
}

/** Of a true inverse no variance is below that with all other parameters known; one of lower rank, cut off, may say 0. */
function isDetermined(fisher: Matrix, inverted: Matrix): boolean {
  return fisher.diagonal().every((f, a) => f * inverted.get(a, a) > 1 - 1e-6);
}

/** The next step would be a small part of a standard error. Steps that were refused or cut leave a fit elsewhere. */
function isAtRest(inverted: Matrix, score: Float64Array): boolean {
  return score.every((_, a) => {
    const step = score.reduce((sum, s, b) => sum + s * inverted.get(a, b), 0);
    return Math.abs(step) < 0.1 * Math.sqrt(inverted.get(a, a));
  });
}

/**
 * How each block moves the free parameters: row s = covariance * (scores of the block's data - coupling * its share of
 * what is held). A reweighted data set then has parameters theta + sum_s (w_s - 1) row_s: one Fisher step from
 * the full fit, exact to first order. blocks * FIT_PARAMETERS, zero for held parameters. O(blocks * cells).
 */
export function blockInfluence(
  fit: ShapeFit,
  blocks: number,
  blockValue: (block: number, cell: number) => number,
  heldShare: (block: number) => { amplitude: number; background: number },
): Float64Array {
  const k = fit.free.length;
  const out = new Float64Array(blocks * FIT_PARAMETERS);
  const cells = fit.model.length;
  const scores = new Float64Array(k);
  for (let s = 0; s < blocks; s += 1) {
    const held = heldShare(s);
    for (let a = 0; a < k; a += 1) {
      scores[a] =
        -held.background * (fit.backgroundCoupling[a] as number) -
        held.amplitude * (fit.amplitudeCoupling[a] as number);
    }
    for (let c = 0; c < cells; c += 1) {
      const n = blockValue(s, c);
      if (n === 0) continue;
      for (let a = 0; a < k; a += 1) {
        scores[a] = (scores[a] as number) + n * ((fit.scoreRows[a] as Float64Array)[c] as number);
      }
    }
    for (let a = 0; a < k; a += 1) {
      let move = 0;
      for (let b2 = 0; b2 < k; b2 += 1) {
        move += (fit.covariance[a * k + b2] as number) * (scores[b2] as number);
      }
      out[s * FIT_PARAMETERS + (fit.free[a] as number)] = move;
    }
  }
  return out;
}
