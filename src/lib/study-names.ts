import type { StudyId } from '../../shared/contracts/study';

/** Names of the studies, for lists that must not wait for the engine; it tells the rest. */
const NAMES: Record<StudyId, string> = {
  delay: 'Delay',
  'joint-map': 'Joint map',
  witness: 'Witness',
  'ghost-image': 'Ghost image',
};

function isKnown(study: string): study is StudyId {
  return Object.hasOwn(NAMES, study);
}

/** A study of a newer version keeps its id. */
export function studyName(study: string): string {
  return isKnown(study) ? NAMES[study] : study;
}
