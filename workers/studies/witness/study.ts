import { planeCounting, planeDials, validatePlaneInput } from '../joint-map/inputs';
import type { Study } from '../study';
import { finishWitness } from './finish';

export const witnessStudy: Study = {
  info: {
    id: 'witness',
    label: 'Witness',
    answers: 'Do the correlations in position and momentum break a separability or a steering bound?',
    inputs: [
      {
        name: 'near',
        label: 'Near field: positions',
        accepts: ['tags', 'frames'],
        arms: ['signal', 'idler'],
        plane: 'near',
      },
      {
        name: 'far',
        label: 'Far field: momenta',
        accepts: ['tags', 'frames'],
        arms: ['signal', 'idler'],
        plane: 'far',
      },
    ],
    dials: planeDials,
  },
  ...planeCounting,
  validate(inputs, dials) {
    validatePlaneInput(inputs, 'near', 'near', dials);
    validatePlaneInput(inputs, 'far', 'far', dials);
  },
  finish: finishWitness,
};
