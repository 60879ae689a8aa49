import type { DialSpec } from '../../../shared/contracts/dial';
import {
  deadTimeDial,
  delayDial,
  histogramBinDial,
  histogramRangeDial,
  resamplesDial,
  shiftCountDial,
  shiftStepDial,
  windowDial,
} from '../dials';

const darkDial = (arm: string): DialSpec => ({
  id: `dark.${arm}`,
  label: `Darks of the ${arm} arm`,
  reason: `Darks and background of the ${arm} arm, measured with the crystal detuned for as long as this run; taken off where it heralds.`,
  needs: 'finish',
  type: 'number',
  unit: '1/s',
  default: 0,
  min: 0,
  max: 1e9,
  step: 100,
  auto: false,
});

export const delayDials: readonly DialSpec[] = [
  delayDial,
  windowDial,
  histogramRangeDial,
  histogramBinDial,
  shiftStepDial,
  shiftCountDial,
  darkDial('signal'),
  darkDial('idler'),
  darkDial('bucket'),
  deadTimeDial,
  resamplesDial,
];
