import type { DialSpec, DialValues, Region } from '../../../shared/contracts/dial';
import type { FrameSpec } from '../../../shared/contracts/tally';
import { Problem } from '../../../shared/errors/problem';
import { JOINT_PIXELS } from '../../kernels/joint-distribution';
import { autoDial, numberDial, regionDial } from '../dials';

const offsetDial: DialSpec = {
  id: 'offset',
  label: 'Offset',
  reason:
    'Level of a dark pixel, taken from every pixel before anything else. Consecutive frames cancel it by themselves but for the first and last: it matters to a threshold, to frames scaled to one total, and to the mean frame.',
  needs: 'bytes',
  for: 'frames',
  type: 'number',
  unit: 'counts',
  default: 0,
  min: -1e6,
  max: 1e6,
  step: 1,
  auto: false,
};

/**
 * Biases. A click is 1 - e^-m of m Poisson photons, and for Poisson pairs c and singles G_ij = (1 - p_i)(1 - p_j)(e^c - 1)
 * with p the click probabilities, so G is low by e^-(m_i + m_j) and never too high; below it the share FN of photons is
 * lost, so pairs are by (1 - FN)^2, and dark pixels above it (FP) only add singles. Basden, Haniff & Mackay, MNRAS 345, 985
 * (2003), from memory, for FP and FN; Defienne, Reichert & Fleischer, PRL 120, 203604 (2018) for the covariance.
 */
const thresholdDial: DialSpec = {
  id: 'threshold',
  label: 'Photon-counting threshold',
  reason:
    'A pixel above it (offset taken off) counts 1, any other 0: takes out the noise of read-out and gain where light is weak. Two photons on one pixel count as one: covariances come out low by e^-m for each pixel of m photons a frame, a third low at 0.2, most where light is brightest, which flattens the beam; photons below it are lost, squared in pairs. Left empty, pixels count what they hold.',
  needs: 'bytes',
  for: 'frames',
  type: 'number',
  unit: 'counts',
  default: null,
  min: -1e6,
  max: 1e6,
  step: 1,
  auto: true,
};

/**
 * Bias. With the totals T alike, sum_j Cov(I_i, I_j) = 0 for every i: to first order in the spread of T,
 * Cov'_ij = Cov_ij - f_i Cov(T, I_j) - f_j Cov(T, I_i) + f_i f_j Var T, f_i the share of pixel i in the light (derived here). Shot
 * noise alone gives -f_i f_j T; a common gain's (dT/T)^2 I_i I_j goes entirely.
 */
const normaliseDial: DialSpec = {
  id: 'normalise',
  label: 'Frames scaled to the mean total',
  reason:
    'Takes out a gain or pump that flickers from frame to frame, which otherwise correlates all pixels alike. It also takes out what pairs add to the total: the covariance of the whole frame is then zero, so that every pair of pixels loses about its share of light times what was there, a broad negative pedestal, and with few photons a frame the total is mostly shot noise. Off unless the light flickers; set the offset first.',
  needs: 'bytes',
  for: 'frames',
  type: 'choice',
  options: [
    { value: 'off', label: 'As they are' },
    { value: 'on', label: 'Scaled' },
  ],
  default: 'off',
};

const crosstalkDial: DialSpec = {
  id: 'crosstalk',
  label: 'Crosstalk radius',
  reason:
    'Frames only: difference bins up to this many pixels are left out, because charge smear and optical crosstalk of neighbours land there and feign a narrow peak. 0 leaves out a pixel with itself alone.',
  needs: 'finish',
  for: 'frames',
  type: 'number',
  unit: 'pixels',
  default: 1,
  min: 0,
  max: 20,
  step: 0.5,
  auto: false,
};

const overlapDial: DialSpec = {
  id: 'overlap',
  label: 'Sum and difference maps',
  reason:
    'Divided by the number of pixel pairs in each bin, a flat pedestal is flat; not divided, it falls to the edges as the overlap of the array with itself. Only what is shown changes: the fit knows the overlap either way.',
  needs: 'finish',
  for: 'frames',
  type: 'choice',
  options: [
    { value: 'mean', label: 'Mean per pixel pair' },
    { value: 'sum', label: 'Sum over pixel pairs' },
  ],
  default: 'mean',
};

export const jointRegionDial: DialSpec = {
  id: 'joint.region',
  label: 'Region of the full joint distribution',
  reason:
    'Sums the covariance of every pixel of the region with every other, up to 4096 pixels (64 x 64): the partners of the brightest pixel and of all, and up to 1600 pixels (40 x 40) every pair. Work grows as the square of the pixels. Not drawn, only the maps of sum, difference and each axis are summed.',
  needs: 'bytes',
  for: 'frames',
  type: 'region',
  default: null,
};

/** @throws Problem `bad-dial` for a region that is larger than can be summed or not on the camera. */
export function jointRegionOf(dials: DialValues, width: number, height: number): Region | null {
  const region = regionDial(dials, jointRegionDial.id);
  if (region === null) return null;
  const { x0, y0, x1, y1 } = region;
  if (x1 >= width || y1 >= height) {
    throw new Problem(
      'bad-dial',
      `The region x ${x0} to ${x1}, y ${y0} to ${y1} was given, but the frames end at x ${width - 1}, y ${height - 1}; draw it on the frame.`,
      jointRegionDial.id,
    );
  }
  const [wide, high] = [x1 - x0 + 1, y1 - y0 + 1];
  if (wide * high > JOINT_PIXELS) {
    throw new Problem(
      'bad-dial',
      `A region of at most ${JOINT_PIXELS} pixels (64 x 64) was expected, one of ${wide} x ${high} was given; draw a smaller one, or bin the frames.`,
      jointRegionDial.id,
    );
  }
  return region;
}

/** What only camera frames have to be asked for. */
export const frameDials: readonly DialSpec[] = [
  offsetDial,
  thresholdDial,
  normaliseDial,
  crosstalkDial,
  overlapDial,
];

export type FrameTreatmentSpec = Required<Pick<FrameSpec, 'offset' | 'threshold' | 'normalised'>>;

export interface FrameChoices {
  treatment: FrameTreatmentSpec;
  /** Difference bins with |d| up to this many pixels are left out. */
  crosstalk: number;
  /** Maps are shown as means per pixel pair. */
  perPair: boolean;
}

export function frameChoices(dials: DialValues): FrameChoices {
  return {
    treatment: {
      offset: numberDial(dials, 'offset'),
      threshold: autoDial(dials, 'threshold'),
      normalised: dials.normalise === 'on',
    },
    crosstalk: numberDial(dials, 'crosstalk'),
    perPair: dials.overlap !== 'sum',
  };
}

/** What was done to the pixels, for the statement; empty where nothing was. */
export function treatmentWords({ offset, threshold, normalised }: FrameTreatmentSpec): string {
  const words: string[] = [];
  if (offset !== 0) words.push(`an offset of ${offset} counts was taken from every pixel`);
  if (threshold !== null) words.push(`pixels above ${threshold} counts counted as one photon`);
  if (normalised)
    words.push('every frame was scaled to the mean total, and the pedestal has the shape of the light');
  return words.length === 0 ? '' : ` Before that, ${words.join(', ')}.`;
}
