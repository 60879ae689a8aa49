import type { Check, Quantity } from '../../shared/contracts/output';
import { formatFigure } from './format-figure';
import { settingQuantity } from './quantities';
import type { ClockFacts } from './study';

/** Beyond this a straight line is not all there is: about five standard deviations for thirty stretches. */
const GOOD_CHI2 = 2.5;
/** Relative rates in parts of a million. */
const PPM = 1e6;

/** Offset and drift of the second clock; nothing where all tags are of one. */
export function clockQuantities(clock: ClockFacts | undefined): Record<string, Quantity> {
  if (clock === undefined) return {};
  const { offset, drift, line } = clock;
  if (line === null) {
    return {
      'clock.offset': settingQuantity(offset.value, 'ps', 'main less second clock at its zero, as given', 0),
      'clock.drift': settingQuantity(
        drift.value,
        '1',
        'rate of the main over the second clock less one, as given',
        0,
      ),
    };
  }
  const how = `weighted line through the coincidence peaks of ${line.found} stretches of the run`;
  return {
    'clock.offset': {
      ...offset,
      unit: 'ps',
      method: `main less second clock at the zero of the second, any true delay included; ${how}`,
      n: line.found,
    },
    'clock.drift': {
      ...drift,
      unit: '1',
      method: `rate of the main over the second clock less one; ${how}`,
      n: line.found,
    },
  };
}

/** Whether one offset and one rate describe the two clocks. */
export function checkClock(clock: ClockFacts | undefined): Check[] {
  if (clock === undefined || clock.line === null) return [];
  const { residualPs, chi2PerDof, peakSigmaPs, found, stretches } = clock.line;
  const drift = `${formatFigure(clock.drift.value * PPM)} ppm`;
  const id = 'clock-line';
  const unit = 'ps';
  if (found < stretches) {
    const sentence = `The coincidence peak was found in ${found} of ${stretches} stretches of the run only; the clocks may have lost each other, or the source was off. Look at the rates over time.`;
    return [{ id, status: 'caution', figure: residualPs, unit, sentence }];
  }
  if (chi2PerDof > GOOD_CHI2 && residualPs > 0.3 * peakSigmaPs) {
    const sentence = `One rate does not describe the clocks: the peak swings by ${formatFigure(residualPs)} ps about a drift of ${drift}. It widens the peak; cut the run into shorter files, or lock the clocks.`;
    return [{ id, status: 'caution', figure: residualPs, unit, sentence }];
  }
  const sentence = `One offset and a drift of ${drift} describe the clocks to ${formatFigure(residualPs)} ps over the run.`;
  return [{ id, status: 'pass', figure: residualPs, unit, sentence }];
}
