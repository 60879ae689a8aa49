import type { Quantity, StudyOutput } from '../../../shared/contracts/output';
import { Problem } from '../../../shared/errors/problem';
import { checkClock, clockQuantities } from '../clock';
import { LOOK_RESAMPLES, numberDial } from '../dials';
import { listQuantities } from '../quantities';
import type { FinishRequest } from '../study';
import { countTags } from '../tag-count';
import { chosenDials } from '../tag-main';
import { coincidencesOf } from '../tag-numbers';
import { frameChoices } from './frame-dials';
import { analysePlane } from './inputs';
import { checkCalibration } from './plane-checks';
import { axisNames, noVariances, type PlaneResult } from './plane-result';
import { addQuantities, type Resampled, widthOf } from './resampled';

export function finishJointMap({ inputs, dials, seed, partial }: FinishRequest): StudyOutput {
  const input = inputs.data;
  if (input === undefined) {
    throw new Problem('missing-input', 'The input "data" is missing; choose an acquisition for it.', 'data');
  }
  const plane = analysePlane(input, {
    resamples: partial ? LOOK_RESAMPLES : numberDial(dials, 'resamples'),
    seed,
    look: partial,
    frames: frameChoices(dials),
  });
  return {
    study: 'joint-map',
    quantities: {
      ...widthQuantities(plane),
      ...(input.tally.kind === 'tags'
        ? listQuantities(coincidencesOf(countTags(input.tally)), null, input.tally.slices).quantities
        : {}),
      ...clockQuantities(input.clock),
    },
    verdicts: {},
    checks: [...plane.checks, checkCalibration(plane.scale), ...checkClock(input.clock)],
    maps: plane.maps,
    chosen: input.tally.kind === 'tags' ? chosenDials(dials, input.chosen) : {},
    statement: stateJointMap(plane),
  };
}

function widthQuantities(plane: PlaneResult): Record<string, Quantity> {
  const { unit } = plane.scale;
  const quantities: Record<string, Quantity> = {};
  const width = (variance: Resampled | null) => ({
    part: variance === null ? null : widthOf(variance),
    unit,
  });
  // Moments weigh the edges of the map most, where few pairs and many accidentals lie.
  const fewPairs = plane.checks.some(({ id, status }) => id === 'pairs-enough' && status === 'fail');
  for (const axis of axisNames) {
    const { net } = plane.axes[axis];
    const moment = fewPairs ? noVariances : plane.axes[axis].moment;
    addQuantities(quantities, {
      [`width.${axis}.minus.fit`]: width(net.minus),
      [`width.${axis}.minus.moment`]: width(moment.minus),
      [`width.${axis}.plus.fit`]: width(net.plus),
      [`width.${axis}.plus.moment`]: width(moment.plus),
      [`width.${axis}.conditional.fit`]: width(net.conditionalSignal),
      [`width.${axis}.conditional.moment`]: width(moment.conditionalSignal),
      [`width.${axis}.signal.fit`]: width(net.signal),
      [`correlation.${axis}`]: { part: net.correlation, unit: '1' },
    });
  }
  return quantities;
}

function stateJointMap(plane: PlaneResult): string {
  const tags =
    'Fitted widths are standard deviations of a bivariate Gaussian by Poisson maximum likelihood on measured accidentals, cut at the edges of the arrays; moments are those of the counts with accidentals subtracted, over the whole map. The conditional width is that of the signal given the idler.';
  const frames =
    'Widths are standard deviations of a Gaussian on a pedestal fitted to the sum and difference maps. One camera sees each pair twice and cannot tell the arms apart, so no conditional width is given.';
  return [
    ...plane.statement,
    plane.kind === 'tags' ? tags : frames,
    `Every width is the standard deviation in crystal units with the blur of the pixels left in, so it is an upper bound; errors are from a block bootstrap over ${plane.blocks} blocks. The calibration adds ${(100 * plane.scale.relative).toFixed(2)} % common to all widths.`,
  ].join(' ');
}
