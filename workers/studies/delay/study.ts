import type { StudyInfo } from '../../../shared/contracts/study';
import { type ArmPair, blindChoice, buildSearchSpec, choosePeak } from '../peak-search';
import type { Study, StudyInput } from '../study';
import { requireTagInput } from '../tag-input';
import { buildMainSpec, chooseArms, validateTagInput } from '../tag-main';
import { delayDials } from './dials';
import { finishDelay } from './finish';

const info: StudyInfo = {
  id: 'delay',
  label: 'Delay',
  answers:
    'How many of the clicks of two arms are real coincidences, how many accidental, and how well is the timing set?',
  inputs: [
    {
      name: 'tags',
      label: 'Time tags of both arms',
      accepts: ['tags'],
      arms: ['signal', 'idler'],
      otherArms: [
        ['bucket', 'idler'],
        ['bucket', 'signal'],
      ],
      plane: 'none',
    },
  ],
  dials: delayDials,
};

const pairs: readonly ArmPair[] = [
  { a: 'signal', b: 'idler' },
  { a: 'bucket', b: 'idler' },
  { a: 'bucket', b: 'signal' },
];

const armsOf = (input: StudyInput): ArmPair => chooseArms(input, pairs, info.label);

export const delayStudy: Study = {
  info,
  validate(inputs, dials) {
    validateTagInput(inputs, 'tags', armsOf, dials);
  },
  searchSpec: (input, dials) => buildSearchSpec(input, armsOf(input), dials),
  choose: (tally, _input, dials) => choosePeak(tally, dials),
  chooseBlind: (_input, dials) => blindChoice(dials),
  spec: (input, dials, chosen) => buildMainSpec(input, armsOf(input), dials, chosen),
  finish({ inputs, dials, seed, partial }) {
    const { tally, chosen, input } = requireTagInput(inputs, 'tags');
    return finishDelay({ tally, chosen, clock: input.clock, arms: armsOf(input), dials, seed, partial });
  },
};
