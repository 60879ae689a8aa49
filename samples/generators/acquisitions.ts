import type { Scenario } from '../../shared/contracts/scenario';
import { frameRun, optics, tagRun } from './bench';

export interface Acquisition {
  file: string;
  /** Scenario kept in samples/scenarios, so that the command line can make it again. */
  scenarioFile: string;
  scenario: Scenario;
  shows: string;
}

const nearTags = tagRun({
  name: 'Lanternfield near field, tags',
  seed: 4101,
  seconds: 0.35,
  optics: optics.near,
  file: { structure: 'recent', recordBytes: 4 },
});
const farTags = tagRun({
  name: 'Lanternfield far field, tags',
  seed: 4102,
  seconds: 0.35,
  optics: optics.far,
});
const ghostTags = tagRun(
  { name: 'Lanternfield ghost image, tags', seed: 4103, seconds: 0.35, optics: optics.near },
  true,
);
const nearFrames = frameRun({
  name: 'Lanternfield near field, frames',
  seed: 4104,
  frames: 6000,
  side: 48,
  optics: optics.near,
});
const farFrames = frameRun({
  name: 'Lanternfield far field, frames',
  seed: 4105,
  frames: 6000,
  side: 48,
  optics: optics.far,
});

export const acquisitions: readonly Acquisition[] = [
  {
    file: 'near-tags.h5',
    scenarioFile: 'near-tags.json',
    scenario: nearTags,
    shows: 'Near field on two 16 × 16 arrays: the photons of a pair are born at the same place.',
  },
  {
    file: 'near-tags.bin',
    scenarioFile: 'near-tags.json',
    scenario: nearTags,
    shows: 'The near-field run again as 4-byte records with rollover markers.',
  },
  {
    file: 'far-tags.h5',
    scenarioFile: 'far-tags.json',
    scenario: farTags,
    shows: 'Far field on the same arrays: the momenta of a pair are opposite.',
  },
  {
    file: 'ghost-tags.h5',
    scenarioFile: 'ghost-tags.json',
    scenario: ghostTags,
    shows: 'A bucket detector behind a lantern stencil, and an array that never sees the stencil.',
  },
  {
    file: 'near-frames.h5',
    scenarioFile: 'near-frames.json',
    scenario: nearFrames,
    shows: 'Near field on one camera, 6000 frames of clicks: a peak in the difference coordinate.',
  },
  {
    file: 'far-frames.h5',
    scenarioFile: 'far-frames.json',
    scenario: farFrames,
    shows: 'Far field on the same camera: a peak in the sum coordinate.',
  },
];
