import type { StudyId } from '../../shared/contracts/study';

/** Names and questions of the studies, for lists that must not wait for the engine. */
const STUDIES: Record<StudyId, { name: string; answers: string }> = {
  delay: {
    name: 'Delay',
    answers: 'Which clicks are coincidences, which accidental, and how sharp the timing is.',
  },
  'joint-map': {
    name: 'Joint map',
    answers:
      'How tightly the pair is correlated in one plane, as joint, sum and difference maps with widths.',
  },
  witness: {
    name: 'Witness',
    answers:
      'Whether position and momentum correlations break a separability or a steering bound, and by how much.',
  },
  'ghost-image': {
    name: 'Ghost image',
    answers: 'What the array shows of an object only the bucket has seen, and how well.',
  },
};

function isKnown(study: string): study is StudyId {
  return Object.hasOwn(STUDIES, study);
}

/** A study of a newer version keeps its id. */
export function studyName(study: string): string {
  return isKnown(study) ? STUDIES[study].name : study;
}

export function studyQuestion(study: string): string {
  return isKnown(study) ? STUDIES[study].answers : '';
}
