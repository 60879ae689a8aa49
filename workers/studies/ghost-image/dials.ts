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

const openDial: DialSpec = {
  id: 'region.open',
  label: 'Open region',
  reason:
    'Pixels where the object lets light through; draw it on the image, then visibility and CNR compare it with the closed region.',
  needs: 'finish',
  type: 'region',
  default: null,
};

const closedDial: DialSpec = {
  id: 'region.closed',
  label: 'Closed region',
  reason:
    'Pixels where the object blocks light. While either region is not drawn, the image is split by itself: chosen on half of the slices of time, measured on the other half.',
  needs: 'finish',
  type: 'region',
  default: null,
};

const bucketDarkDial: DialSpec = {
  id: 'dark.bucket',
  label: 'Darks of the bucket',
  reason:
    'Darks and background of the bucket, measured with the crystal detuned for as long as this run; taken off where the bucket heralds.',
  needs: 'finish',
  type: 'number',
  unit: '1/s',
  default: 0,
  min: 0,
  max: 1e9,
  step: 100,
  auto: false,
};

export const ghostImageDials: readonly DialSpec[] = [
  delayDial,
  windowDial,
  histogramRangeDial,
  histogramBinDial,
  shiftStepDial,
  shiftCountDial,
  openDial,
  closedDial,
  bucketDarkDial,
  deadTimeDial,
  resamplesDial,
];
