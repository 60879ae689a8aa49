import type { DialSpec } from '../../../shared/contracts/dial';
import { darkDial, deadTimeDial, pairTagDials, resamplesDial } from '../dials';

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

export const ghostImageDials: readonly DialSpec[] = [
  ...pairTagDials,
  openDial,
  closedDial,
  darkDial('bucket'),
  deadTimeDial,
  resamplesDial,
];
