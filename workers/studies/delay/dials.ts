import type { DialSpec } from '../../../shared/contracts/dial';
import { darkDial, deadTimeDial, pairTagDials, resamplesDial } from '../dials';

export const delayDials: readonly DialSpec[] = [
  ...pairTagDials,
  darkDial('signal'),
  darkDial('idler'),
  darkDial('bucket'),
  deadTimeDial,
  resamplesDial,
];
