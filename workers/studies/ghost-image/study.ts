import type { StudyInfo } from '../../../shared/contracts/study';
import { type ArmPair, blindChoice, buildSearchSpec, choosePeak } from '../peak-search';
import type { Study, StudyInput } from '../study';
import { requireTagInput } from '../tag-input';
import { buildMainSpec, chooseArms, validateTagInput } from '../tag-main';
import { ghostImageDials } from './dials';
import { finishGhostImage } from './finish';
import { assertRegionsFit } from './regions';

const info: StudyInfo = {
  id: 'ghost-image',
  label: 'Ghost image',
  answers: 'What does the array show of an object that only the bucket has seen, and how well?',
  inputs: [
    {
      name: 'tags',
      label: 'Time tags with a bucket',
      accepts: ['tags'],
      arms: ['bucket', 'idler'],
      otherArms: [['bucket', 'signal']],
      plane: 'none',
    },
  ],
  dials: ghostImageDials,
};

const pairs: readonly ArmPair[] = [
  { a: 'bucket', b: 'idler' },
  { a: 'bucket', b: 'signal' },
];

const armsOf = (input: StudyInput): ArmPair => chooseArms(input, pairs, info.label);

export const ghostImageStudy: Study = {
  info,
  validate(inputs, dials) {
    const input = validateTagInput(inputs, 'tags', armsOf, dials);
    const array = input.detector.kind === 'tags' ? input.detector[armsOf(input).b] : undefined;
    if (array !== undefined && 'width' in array) assertRegionsFit(dials, array.width, array.height);
  },
  searchSpec: (input, dials) => buildSearchSpec(input, armsOf(input), dials),
  choose: (tally, _input, dials) => choosePeak(tally, dials),
  chooseBlind: (_input, dials) => blindChoice(dials),
  spec: (input, dials, chosen) => buildMainSpec(input, armsOf(input), dials, chosen),
  finish({ inputs, dials, seed, partial }) {
    const { tally, chosen, input } = requireTagInput(inputs, 'tags');
    return finishGhostImage({ tally, chosen, clock: input.clock, arms: armsOf(input), dials, seed, partial });
  },
};
