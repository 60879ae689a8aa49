import type { MapData, Quantity, StudyOutput, Verdict } from '../../../shared/contracts/output';
import { checkClock, clockQuantities } from '../clock';
import { LOOK_RESAMPLES, numberDial } from '../dials';
import { formatMeasured } from '../format-figure';
import { frameChoices } from '../joint-map/frame-dials';
import { analysePlane } from '../joint-map/inputs';
import { axisNames, type PlaneRequest, type PlaneResult } from '../joint-map/plane-result';
import { addQuantities, type Resampled, widthOf } from '../joint-map/resampled';
import type { CountedInput, FinishRequest } from '../study';
import { chosenDials } from '../tag-main';
import {
  checkBalance,
  checkProductCalibration,
  checkSamePixels,
  planeChecks,
  productSystematic,
} from './checks';
import { doubtsOf } from './doubts';
import {
  type AxisProducts,
  axisProducts,
  bothAxes,
  fedorovOf,
  type Subtraction,
  schmidtOf,
} from './products';
import { type Judged, judgedProducts, verdictOf } from './verdicts';

type PlaneName = 'near' | 'far';

export function finishWitness({ inputs, dials, seed, partial }: FinishRequest): StudyOutput {
  const request: PlaneRequest = {
    resamples: partial ? LOOK_RESAMPLES : numberDial(dials, 'resamples'),
    seed,
    look: partial,
    frames: frameChoices(dials),
  };
  const output: StudyOutput = {
    study: 'witness',
    quantities: {},
    verdicts: {},
    checks: [],
    maps: {},
    chosen: {},
    statement: '',
  };
  // Planes were measured apart: their resamples must not share draws.
  const near = takePlane(output, 'near', inputs.near, request, dials);
  const far = takePlane(output, 'far', inputs.far, { ...request, seed: (seed ^ 0x5bd1e995) >>> 0 }, dials);
  if (near === null || far === null || inputs.near === undefined || inputs.far === undefined) {
    const missing = near === null ? 'near' : 'far';
    output.statement = `The ${missing}-field acquisition is still to be read; a witness needs both planes.`;
    return output;
  }
  const judged = addProducts(output, near, far);
  const context = {
    looking: partial,
    doubts: doubtsOf([near, far]),
    systematic: productSystematic(near, far),
  };
  for (const one of judged) {
    const verdict = verdictOf(one, context);
    if (verdict !== null) output.verdicts[one.id] = verdict;
  }
  output.checks.push(checkSamePixels(inputs.near, inputs.far));
  const balance = checkBalance(near, far);
  if (balance !== null) output.checks.push(balance);
  output.checks.push(
    checkProductCalibration(near, far, output.verdicts, (id) => output.quantities[id]?.value),
  );
  output.statement = stateWitness(near, far, output.verdicts, output.quantities);
  return output;
}

/** Maps, checks, widths and choices of one plane; null when it has not begun. */
function takePlane(
  output: StudyOutput,
  name: PlaneName,
  input: CountedInput | undefined,
  request: PlaneRequest,
  dials: FinishRequest['dials'],
): PlaneResult | null {
  if (input === undefined) return null;
  const plane = analysePlane(input, request);
  Object.assign(output.maps, renamed(plane.maps, name));
  output.checks.push(...planeChecks(name, [...plane.checks, ...checkClock(input.clock)]));
  addWidths(output.quantities, name, plane);
  for (const [id, quantity] of Object.entries(clockQuantities(input.clock))) {
    output.quantities[`${id}.${name}`] = quantity;
  }
  if (input.tally.kind === 'tags') {
    for (const [id, value] of Object.entries(chosenDials(dials, input.chosen))) {
      output.chosen[`${id}.${name}`] = value;
    }
  }
  return plane;
}

function renamed(maps: Record<string, MapData>, name: PlaneName): Record<string, MapData> {
  return Object.fromEntries(
    Object.entries(maps).map(([id, map]) => [
      `${id}.${name}`,
      { ...map, label: `${map.label}, ${name} field` },
    ]),
  );
}

function addWidths(quantities: Record<string, Quantity>, name: PlaneName, plane: PlaneResult): void {
  const { unit } = plane.scale;
  const width = (variance: Resampled | null) => ({
    part: variance === null ? null : widthOf(variance),
    unit,
  });
  const narrow = name === 'near' ? 'minus' : 'plus';
  for (const axis of axisNames) {
    for (const what of ['raw', 'net'] as const) {
      const variances = plane.axes[axis][what];
      addQuantities(quantities, {
        [`width.${axis}.${narrow}.${what}`]: width(variances[narrow]),
        [`width.${axis}.conditional.${name}.${what}`]: width(variances.conditionalSignal),
      });
    }
    if (name === 'near') {
      addQuantities(quantities, {
        [`fedorov.${axis}`]: { part: fedorovOf(plane.axes[axis].net), unit: '1' },
      });
    }
  }
}

function addProducts(output: StudyOutput, near: PlaneResult, far: PlaneResult): Judged[] {
  const judged: Judged[] = [];
  const unit = 'hbar^2';
  for (const what of ['raw', 'net'] as const) {
    const x = axisProducts(near, far, 'x', what);
    const y = axisProducts(near, far, 'y', what);
    const xy = {
      reid: bothAxes(x.reid, y.reid),
      mancini: bothAxes(x.mancini, y.mancini),
      bounded: x.bounded,
    };
    judged.push(
      ...judgedProducts(x, 'x', what),
      ...judgedProducts(y, 'y', what),
      ...judgedProducts(xy, 'xy', what),
    );
    addReverse(output.quantities, { x, y }, what);
    if (what === 'net') addSchmidt(output.quantities, x, y);
  }
  addQuantities(output.quantities, Object.fromEntries(judged.map(({ id, part }) => [id, { part, unit }])));
  return judged;
}

/** The other way of inferring, idler from signal: no verdict of its own, so that nobody picks the better of two. */
function addReverse(
  quantities: Record<string, Quantity>,
  products: Record<'x' | 'y', AxisProducts>,
  what: Subtraction,
): void {
  for (const axis of axisNames) {
    addQuantities(quantities, {
      [`reid.${axis}.idler.${what}`]: { part: products[axis].reidIdler, unit: 'hbar^2' },
    });
  }
}

function addSchmidt(quantities: Record<string, Quantity>, x: AxisProducts, y: AxisProducts): void {
  const kx = schmidtOf(x.reid, x.bounded);
  const ky = schmidtOf(y.reid, y.bounded);
  const both = bothAxes(x.reid, y.reid);
  // K = Kx Ky = 1/(4 sqrt(Wx Wy)).
  const k = both && {
    ...both,
    value: 1 / (4 * both.value),
    resampled: both.resampled.map((w) => 1 / (4 * w)),
    method: `product of both axes; ${kx?.method ?? ''}`,
  };
  addQuantities(quantities, {
    'schmidt.x': { part: kx, unit: '1' },
    'schmidt.y': { part: ky, unit: '1' },
    schmidt: { part: k, unit: '1' },
  });
}

function stateWitness(
  near: PlaneResult,
  far: PlaneResult,
  verdicts: Record<string, Verdict>,
  quantities: Record<string, Quantity>,
): string {
  const stated = [
    ['reid.x.raw', 'Reid product in x, raw'],
    ['reid.x.net', 'Reid product in x, accidentals subtracted'],
    ['mancini.x.net', 'Mancini product in x, accidentals subtracted'],
  ] as const;
  const sentences = stated.flatMap(([id, words]) => {
    const verdict = verdicts[id];
    const quantity = quantities[id];
    if (verdict === undefined || quantity === undefined || quantity.sigma === null) return [];
    return [`${words}: ${formatMeasured(quantity.value, quantity.sigma)} ħ². ${verdict.sentence}`];
  });
  const systematic = (100 * productSystematic(near, far)).toFixed(1);
  return [
    ...near.statement,
    ...far.statement,
    ...sentences,
    'Conventions: hbar = 1, plain differences and sums; the Reid product V(x1|x2) V(k1|k2) has the bound 1/4, the Mancini product Var(x1-x2) Var(k1+k2) the bound 1; the signal is inferred from the idler.',
    `Errors are from a block bootstrap (${near.blocks} and ${far.blocks} blocks), significance is that on the logarithmic scale. The calibrations add ${systematic} % to every product. The Schmidt number holds for pure double-Gaussian states only.`,
  ].join(' ');
}
