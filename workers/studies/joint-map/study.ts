import type { Study } from '../study';
import { finishJointMap } from './finish';
import { jointRegionDial } from './frame-dials';
import { planeCounting, planeDials, validatePlaneInput } from './inputs';

export const jointMapStudy: Study = {
  info: {
    id: 'joint-map',
    label: 'Joint map',
    answers:
      'How tightly are the two photons of a pair correlated in position or anti-correlated in momentum?',
    inputs: [
      {
        name: 'data',
        label: 'Tags of both arms, or camera frames, in one plane',
        accepts: ['tags', 'frames'],
        arms: ['signal', 'idler'],
        plane: 'any',
      },
    ],
    dials: [...planeDials, jointRegionDial],
  },
  ...planeCounting,
  validate(inputs, dials) {
    validatePlaneInput(inputs, 'data', 'any', dials);
  },
  finish: finishJointMap,
};
