import type { StudyId } from '../../shared/contracts/study';
import { Problem } from '../../shared/errors/problem';
import { delayStudy } from './delay/study';
import { ghostImageStudy } from './ghost-image/study';
import { jointMapStudy } from './joint-map/study';
import type { Study } from './study';
import { witnessStudy } from './witness/study';

/** Every study of the workbench; a new one is a folder and a line here. */
export const studies: Record<StudyId, Study> = {
  delay: delayStudy,
  'joint-map': jointMapStudy,
  witness: witnessStudy,
  'ghost-image': ghostImageStudy,
};

/** @throws Problem `bad-preset` for a study that does not exist. */
export function studyById(id: string): Study {
  const study = Object.values(studies).find((known) => known.info.id === id);
  if (study !== undefined) return study;
  throw new Problem(
    'bad-preset',
    `There is no study "${id}"; there are ${Object.keys(studies).join(', ')}.`,
    'study',
  );
}
