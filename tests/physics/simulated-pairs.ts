import type { Quantity } from '../../shared/contracts/output';
import type { TagScenario } from '../../shared/contracts/scenario';
import { erf } from '../../shared/physics/special';
import { parseScenario } from '../../workers/simulate/scenario';
import { ratesOf, truthOf } from '../../workers/simulate/truth';
import { fillDials } from '../../workers/studies/dials';
import { jointMapStudy } from '../../workers/studies/joint-map/study';
import type { CountedInput } from '../../workers/studies/study';
import { witnessStudy } from '../../workers/studies/witness/study';
import { type SeedStatistics, seedStatistics } from '../support/seed-statistics';
import { runScenarios } from './run-scenarios';

/** Small near- and far-field runs with every number known: about 9000 pairs and 1.4 % accidentals each. */
export function pairScenario(plane: 'near' | 'far', seed: number): TagScenario {
  const array = {
    kind: 'array',
    efficiency: 0.3,
    width: 16,
    height: 16,
    pitchUm: 50,
    jitterPs: 500,
    darksPerSecond: 200,
  };
  const scenario = parseScenario({
    version: 1,
    kind: 'tags',
    name: `${plane} truth`,
    seed,
    source: { pumpNm: 405, pumpWaistUm: 75, crystalMm: 5, pumpIndex: 1.66, signalNm: 810, idlerNm: 810 },
    optics: plane === 'near' ? { kind: 'near', magnification: 4 } : { kind: 'far', focalLengthMm: 22 },
    seconds: 0.02,
    tickFs: 10_000,
    pairsPerSecond: 5e6,
    signal: { ...array, firstChannel: 0 },
    idler: { ...array, firstChannel: 256, delayPs: 23_700 },
  });
  if (scenario.kind !== 'tags') throw new Error('a tag scenario was expected');
  return scenario;
}

type AxisName = 'x' | 'y';

/** Moments of a joint table [idler][signal] in the unit of the truth: variances, covariance, mean column variance. */
interface TableMoments {
  v1: number;
  v2: number;
  c: number;
  conditional: number;
}

function tableMoments(table: Float64Array, side: number, step: number): TableMoments {
  let [n, s1, s2, s11, s22, s12, within] = [0, 0, 0, 0, 0, 0, 0];
  for (let b = 0; b < side; b++) {
    let [column, sum, squares] = [0, 0, 0];
    for (let a = 0; a < side; a++) {
      const p = table[b * side + a]!;
      column += p;
      sum += p * a;
      squares += p * a * a;
    }
    n += column;
    s1 += sum;
    s2 += column * b;
    s11 += squares;
    s22 += column * b * b;
    s12 += sum * b;
    within += squares - sum ** 2 / column;
  }
  const square = step * step;
  return {
    v1: square * (s11 / n - (s1 / n) ** 2),
    v2: square * (s22 / n - (s2 / n) ** 2),
    c: square * (s12 / n - (s1 * s2) / n ** 2),
    conditional: (square * within) / n,
  };
}

/** um or 1/mm a pixel. */
function stepOf(scenario: TagScenario): number {
  const { optics, source } = scenario;
  if (optics.kind === 'near') return 50 / optics.magnification;
  return (2 * Math.PI * 50) / ((source.signalNm / 1000) * optics.focalLengthMm);
}

/** What a joint map should find: fits the blurred law, moments what the array catches of it. */
function widthTruth(scenario: TagScenario): Record<string, number> {
  const truth = truthOf(scenario);
  const all: Record<string, number> = {};
  for (const axis of ['x', 'y'] as const) {
    const { blurred, pixels } = truth[axis];
    const { v1, v2, c } = tableMoments(pixels.joint, 16, stepOf(scenario));
    all[`width.${axis}.minus.fit`] = blurred.minus;
    all[`width.${axis}.plus.fit`] = blurred.plus;
    all[`width.${axis}.conditional.fit`] = blurred.conditional;
    all[`width.${axis}.signal.fit`] = blurred.single;
    all[`width.${axis}.minus.moment`] = Math.sqrt(v1 + v2 - 2 * c);
    all[`width.${axis}.plus.moment`] = Math.sqrt(v1 + v2 + 2 * c);
    all[`width.${axis}.conditional.moment`] = Math.sqrt(v1 - c ** 2 / v2);
  }
  return all;
}

/** Second moments of pairs and accidentals together, in the window that the study chose. */
function rawMoments(scenario: TagScenario, axis: AxisName, windowPs: number): TableMoments {
  const rates = ratesOf(scenario);
  const truth = truthOf(scenario);
  const { pixels } = truth[axis];
  const sigmaPs = Math.sqrt(2 * 500 ** 2 + 100 / 6);
  const kept = rates.pairs * erf(windowPs / 2 / (sigmaPs * Math.SQRT2));
  const total = pixels.joint.reduce((sum, p) => sum + p, 0);
  // Tags of one arm along the axis: its photons, and darks that are flat.
  const singles = (arm: 'signal' | 'idler'): Float64Array => {
    const other = truth[axis === 'x' ? 'y' : 'x'].pixels[arm].reduce((sum, p) => sum + p, 0);
    const seen = scenario.pairsPerSecond * 0.3 * other;
    return pixels[arm].map((p) => seen * p + 16 * 200);
  };
  const [signal, idler] = [singles('signal'), singles('idler')];
  const table = pixels.joint.map((p, i) => {
    const accidentals = signal[i % 16]! * idler[Math.floor(i / 16)]! * windowPs * 1e-12;
    return (kept * p) / total + accidentals;
  });
  return tableMoments(table, 16, stepOf(scenario));
}

/** hbar = 1: um^2 times 1/mm^2 is 1e-6. */
const HBAR_UNIT = 1e-6;

function witnessTruth(
  near: TagScenario,
  far: TagScenario,
  windowsPs: { near: number; far: number },
): Record<string, number> {
  const all: Record<string, number> = {};
  for (const axis of ['x', 'y'] as const) {
    const n = truthOf(near)[axis];
    const f = truthOf(far)[axis];
    const raw = {
      near: rawMoments(near, axis, windowsPs.near),
      far: rawMoments(far, axis, windowsPs.far),
    };
    all[`reid.${axis}.net`] = HBAR_UNIT * (n.blurred.conditional * f.blurred.conditional) ** 2;
    all[`mancini.${axis}.net`] = HBAR_UNIT * (n.blurred.minus * f.blurred.plus) ** 2;
    all[`reid.${axis}.raw`] = HBAR_UNIT * raw.near.conditional * raw.far.conditional;
    all[`mancini.${axis}.raw`] =
      HBAR_UNIT * (raw.near.v1 + raw.near.v2 - 2 * raw.near.c) * (raw.far.v1 + raw.far.v2 + 2 * raw.far.c);
  }
  return all;
}

/** A number found in one run, and what it should be. */
export interface Found {
  value: number;
  sigma: number | null;
  truth: number;
}

const productNames = ['reid', 'mancini'] as const;
const widthNames = [
  'minus.fit',
  'plus.fit',
  'conditional.fit',
  'minus.moment',
  'plus.moment',
  'conditional.moment',
] as const;

/**
 * Witness and joint maps of simulated runs, one near and one far for each seed. The scene is the same along x and y, so
 * that both axes are samples of one quantity: two for each seed.
 */
export function findPairTruths(firstSeed: number, seeds: number): Map<string, Found[]> {
  const found = new Map<string, Found[]>();
  const add = (name: string, quantity: Quantity | undefined, truth: number | undefined): void => {
    if (quantity === undefined || truth === undefined) throw new Error(`${name} is missing`);
    found.set(name, [...(found.get(name) ?? []), { ...quantity, truth }]);
  };
  const mapDials = fillDials(jointMapStudy.info, {});
  for (let k = 0; k < seeds; k++) {
    const seed = firstSeed + k;
    const near = pairScenario('near', 2 * seed);
    const far = pairScenario('far', 2 * seed + 1);
    const { output, inputs } = runScenarios(witnessStudy, { near, far });
    const products = witnessTruth(near, far, { near: windowOf(inputs.near), far: windowOf(inputs.far) });
    for (const axis of ['x', 'y'] as const) {
      for (const product of productNames) {
        for (const what of ['net', 'raw'] as const) {
          const id = `${product}.${axis}.${what}`;
          add(`${product}.${what}`, output.quantities[id], products[id]);
        }
      }
    }
    for (const [plane, scenario] of [['near', near] as const, ['far', far] as const]) {
      const map = jointMapStudy.finish({
        inputs: { data: inputs[plane] },
        dials: mapDials,
        seed,
        partial: false,
      });
      const widths = widthTruth(scenario);
      for (const axis of ['x', 'y'] as const) {
        for (const width of widthNames) {
          const id = `width.${axis}.${width}`;
          add(`${plane} width.${width}`, map.quantities[id], widths[id]);
        }
      }
    }
  }
  return found;
}

/** Full width of the prompt window, ps: whole ticks, both ends counted. */
function windowOf(input: CountedInput | undefined): number {
  if (input?.tally.kind !== 'tags') throw new Error('a tag tally was expected');
  const { window, tickFs } = input.tally;
  return ((window.hiTick - window.loTick + 1) * tickFs) / 1000;
}

/**
 * Bias and coverage of one quantity of `findPairTruths`. Both axes of a run share its accidentals, so the standard error
 * of the mean is taken over runs, of the mean of x and y; every interval counts for the coverage.
 */
export function pairStatistics(found: readonly Found[]): SeedStatistics {
  const runs: Found[] = [];
  for (let k = 0; k + 1 < found.length; k += 2) {
    const [x, y] = [found[k]!, found[k + 1]!];
    runs.push({ value: (x.value + y.value) / 2, sigma: null, truth: (x.truth + y.truth) / 2 });
  }
  return { bias: seedStatistics(runs).bias, coverage: seedStatistics(found).coverage };
}

/** What every estimate has to fulfil over many seeds. Intervals of one sigma hold the truth in 68 % of runs. */
export const criterion = { bias: 2, coverage: [0.55, 0.8] } as const;
