import type { Arm } from '../../shared/contracts/detector';
import type { DialSpec, DialValue, DialValues, Region } from '../../shared/contracts/dial';
import type { StudyInfo } from '../../shared/contracts/study';
import { Problem } from '../../shared/errors/problem';

/**
 * Every dial of the study with its default where none was given.
 * @throws Problem `bad-dial` for an unknown dial, a value of another type or one outside the limits.
 */
export function fillDials(info: StudyInfo, given: DialValues): DialValues {
  const specs = new Map(info.dials.map((dial) => [dial.id, dial]));
  const filled: DialValues = {};
  for (const dial of info.dials) filled[dial.id] = dial.default;
  for (const [id, value] of Object.entries(given)) {
    const spec = specs.get(id);
    if (spec === undefined) {
      throw new Problem(
        'bad-dial',
        `The study ${info.label} has no dial "${id}"; it has ${[...specs.keys()].join(', ')}.`,
        id,
      );
    }
    filled[id] = requireValue(spec, value);
  }
  return filled;
}

function requireValue(spec: DialSpec, value: DialValue): DialValue {
  switch (spec.type) {
    case 'number':
    case 'integer':
      return requireNumber(spec, value);
    case 'choice':
      if (typeof value === 'string' && spec.options.some((option) => option.value === value)) return value;
      throw wrong(spec, `one of ${spec.options.map((option) => option.value).join(', ')}`, value);
    case 'region':
      if (value === null || (typeof value === 'object' && value.x1 >= value.x0 && value.y1 >= value.y0)) {
        return value;
      }
      throw wrong(spec, 'a rectangle {x0, y0, x1, y1} with x0 <= x1 and y0 <= y1, or null', value);
  }
}

function requireNumber(spec: DialSpec & { type: 'number' | 'integer' }, value: DialValue): DialValue {
  if (value === null && spec.auto) return null;
  const whole = spec.type === 'integer' ? 'a whole number' : 'a number';
  const unit = spec.unit === '' || spec.unit === '1' ? '' : ` ${spec.unit}`;
  const expected = `${whole} from ${spec.min} to ${spec.max}${unit}${spec.auto ? ', or null to let the study choose' : ''}`;
  const fits =
    typeof value === 'number' &&
    value >= spec.min &&
    value <= spec.max &&
    (spec.type === 'number' || Number.isInteger(value));
  if (!fits) throw wrong(spec, expected, value);
  return value;
}

function wrong(spec: DialSpec, expected: string, value: DialValue): Problem {
  const message = `The dial "${spec.id}" (${spec.label}) takes ${expected}; ${JSON.stringify(value)} was given.`;
  return new Problem('bad-dial', message, spec.id);
}

/** Value of a number dial that is always set. */
export function numberDial(dials: DialValues, id: string): number {
  const value = dials[id];
  if (typeof value === 'number') return value;
  throw new Problem('bad-dial', `The dial "${id}" needs a number; ${JSON.stringify(value)} was given.`, id);
}

/** Value of a number dial that may be left to the study: then null. */
export function autoDial(dials: DialValues, id: string): number | null {
  return dials[id] === null || dials[id] === undefined ? null : numberDial(dials, id);
}

export function regionDial(dials: DialValues, id: string): Region | null {
  const value = dials[id] ?? null;
  if (value === null || typeof value === 'object') return value;
  throw new Problem(
    'bad-dial',
    `The dial "${id}" needs a rectangle; ${JSON.stringify(value)} was given.`,
    id,
  );
}

/** Where the coincidence peak is expected: tau = t(second arm) - t(first arm). */
export const delayDial: DialSpec = {
  id: 'delay',
  label: 'Delay',
  reason:
    'Centre of the coincidence window; left empty, the study looks for the peak and says where it found it.',
  needs: 'pairs',
  for: 'tags',
  type: 'number',
  unit: 'ps',
  default: null,
  min: -1e9,
  max: 1e9,
  step: 10,
  auto: true,
};

export const windowDial: DialSpec = {
  id: 'window',
  label: 'Coincidence window',
  reason:
    'Full width of the window; wider keeps more pairs and more accidentals. Left empty it is four sigma of the fitted peak, which keeps 95.4 % of a Gaussian one.',
  needs: 'pairs',
  for: 'tags',
  type: 'number',
  unit: 'ps',
  default: null,
  min: 1,
  max: 1e7,
  step: 10,
  auto: true,
};

export const histogramRangeDial: DialSpec = {
  id: 'histogram.range',
  label: 'Histogram half range',
  reason:
    'How far the delay histogram reaches to either side of the peak; the search for the peak looks five times as far around zero.',
  needs: 'pairs',
  for: 'tags',
  type: 'number',
  unit: 'ns',
  default: 200,
  min: 0.1,
  max: 100_000,
  step: 10,
  auto: false,
};

export const histogramBinDial: DialSpec = {
  id: 'histogram.bin',
  label: 'Histogram bin',
  reason: 'Width of a bin of the delay histogram; left empty it is a third of the sigma of the peak.',
  needs: 'pairs',
  for: 'tags',
  type: 'number',
  unit: 'ps',
  default: null,
  min: 0.001,
  max: 1e7,
  step: 1,
  auto: true,
};

export const shiftStepDial: DialSpec = {
  id: 'shift.step',
  label: 'Shifted-window step',
  reason:
    'Distance from the peak to the first window that counts accidentals, and between those windows; a multiple of the pump period when the pump is pulsed. Left empty it is 20 ns, or two windows or ten sigma of the peak where those are more.',
  needs: 'pairs',
  for: 'tags',
  type: 'number',
  unit: 'ps',
  default: null,
  min: 1,
  max: 1e8,
  step: 1000,
  auto: true,
};

export const shiftCountDial: DialSpec = {
  id: 'shift.count',
  label: 'Shifted windows',
  reason:
    'How many shifted windows are averaged, half on either side; more make the accidentals more certain.',
  needs: 'pairs',
  for: 'tags',
  type: 'integer',
  unit: '',
  default: 10,
  min: 1,
  max: 100,
  step: 1,
  auto: false,
};

export const deadTimeDial: DialSpec = {
  id: 'dead.time',
  label: 'Dead time of a pixel',
  reason:
    'How long a pixel is blind after a click, from its data sheet; only the check for saturated pixels uses it, counts are not corrected.',
  needs: 'finish',
  for: 'tags',
  type: 'number',
  unit: 'ns',
  default: 50,
  min: 0,
  max: 1e6,
  step: 5,
  auto: false,
};

/** Darks are measured apart: nothing in a run tells them from fluorescence. */
export const darkDial = (arm: Arm): DialSpec => ({
  id: `dark.${arm}`,
  label: `Darks of the ${arm} arm`,
  reason: `Darks and background of the ${arm} arm, measured with the crystal detuned for as long as this run; taken off where it heralds.`,
  needs: 'finish',
  for: 'tags',
  type: 'number',
  unit: '1/s',
  default: 0,
  min: 0,
  max: 1e9,
  step: 100,
  auto: false,
});

/** What every study of time tags asks for: where the pairs are, and how accidentals are counted. */
export const pairTagDials: readonly DialSpec[] = [
  delayDial,
  windowDial,
  histogramRangeDial,
  histogramBinDial,
  shiftStepDial,
  shiftCountDial,
];

export const resamplesDial: DialSpec = {
  id: 'resamples',
  label: 'Bootstrap resamples',
  reason: 'How often the blocks of time are drawn anew to find the uncertainties; 1000 give them to 2 %.',
  needs: 'finish',
  type: 'integer',
  unit: '',
  default: 1000,
  min: 100,
  max: 100_000,
  step: 100,
  auto: false,
};

/** A look while reading takes few resamples: its errors are good to a tenth. */
export const LOOK_RESAMPLES = 60;

/** Frames only; tags always have their 65 to 128 slices of time. */
export const blocksDial: DialSpec = {
  id: 'blocks',
  label: 'Bootstrap blocks',
  reason:
    'Into how many blocks of frames the acquisition is cut for the bootstrap; each should outlast the drift of the source, and there should be 20 or more.',
  needs: 'bytes',
  for: 'frames',
  type: 'integer',
  unit: '',
  default: 50,
  min: 20,
  max: 200,
  step: 1,
  auto: false,
};
