import type { DialValues } from '../../shared/contracts/dial';
import type { TagSpec } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { autoDial, numberDial } from './dials';
import { type ArmPair, AUTO_WINDOW_SIGMAS } from './peak-search';
import type { Chosen, StudyInput } from './study';
import { hasArm, tickFsOf } from './tag-input';
import { buildTagSpec, detectorArm } from './tag-spec';

/** What the main pass runs with: a person's dials first, the study's choices for the rest. All in ps. */
export interface TagSettings {
  delay: number;
  window: number;
  bin: number;
  shiftStep: number;
}

/** Leaves room for the tails that most single-photon detectors add to their peak. */
const LEAST_STEP_PS = 20_000;

/** Clear of the window and of the peak, also of one that the window cuts; whole ns. */
function clearStep(windowPs: number, sigmaPs: number): number {
  return Math.ceil(Math.max(LEAST_STEP_PS, 2 * windowPs, 10 * sigmaPs) / 1000) * 1000;
}

export function tagSettings(dials: DialValues, chosen: Chosen): TagSettings {
  const delay = autoDial(dials, 'delay') ?? chosen.delay;
  const window = autoDial(dials, 'window') ?? chosen.window;
  if (delay === undefined || window === undefined) {
    throw new Problem('internal', 'The main pass was asked for before the peak was searched.');
  }
  const bin = autoDial(dials, 'histogram.bin') ?? chosen['histogram.bin'] ?? window / AUTO_WINDOW_SIGMAS / 3;
  const sigma = chosen.sigma ?? window / AUTO_WINDOW_SIGMAS;
  return { delay, window, bin, shiftStep: autoDial(dials, 'shift.step') ?? clearStep(window, sigma) };
}

/** Window, shifted windows and histogram around the delay, for the two arms. */
export function buildMainSpec(input: StudyInput, arms: ArmPair, dials: DialValues, chosen: Chosen): TagSpec {
  const tickFs = tickFsOf(input);
  const settings = tagSettings(dials, chosen);
  return buildTagSpec({
    a: detectorArm(input.detector, arms.a, tickFs),
    b: detectorArm(input.detector, arms.b, tickFs),
    tickFs,
    delayPs: settings.delay,
    windowPs: settings.window,
    shiftStepPs: settings.shiftStep,
    shiftCount: numberDial(dials, 'shift.count'),
    histogramRangePs: numberDial(dials, 'histogram.range') * 1000,
    histogramBinPs: settings.bin,
  });
}

/** For `StudyOutput.chosen`: the dials that were left to the study, with what it settled on. */
export function chosenDials(dials: DialValues, chosen: Chosen): Record<string, number> {
  const settings = tagSettings(dials, chosen);
  const values = {
    delay: settings.delay,
    window: settings.window,
    'histogram.bin': settings.bin,
    'shift.step': settings.shiftStep,
  };
  return Object.fromEntries(Object.entries(values).filter(([id]) => autoDial(dials, id) === null));
}

/**
 * The first pair of arms that the detector map names, in the order of preference.
 * @throws Problem `bad-detector` when it names none of them.
 */
export function chooseArms(input: StudyInput, pairs: readonly ArmPair[], study: string): ArmPair {
  const found = pairs.find((pair) => hasArm(input, pair.a) && hasArm(input, pair.b));
  if (found !== undefined) return found;
  const wanted = pairs.map((pair) => `${pair.a} and ${pair.b}`).join(', or ');
  throw new Problem(
    'bad-detector',
    `${study} needs a detector map with ${wanted}; add the missing arm to the map.`,
    'detector',
  );
}

/** Everything that can be refused before a byte is counted: arms, channels, mask, and dials that do not fit together. */
export function validateTagInput(
  inputs: Record<string, StudyInput>,
  name: string,
  armsOf: (input: StudyInput) => ArmPair,
  dials: DialValues,
): StudyInput {
  const input = inputs[name];
  if (input === undefined) {
    throw new Problem('missing-input', `The input "${name}" is missing; choose an acquisition for it.`, name);
  }
  const arms = armsOf(input);
  const window = autoDial(dials, 'window');
  // With the window left to the study, the narrowest one stands in: only what is wrong for any window is refused here.
  buildMainSpec(input, arms, dials, { delay: 0, window: window ?? 0, 'histogram.bin': 1 });
  return input;
}
