import type { Check } from '../../../shared/contracts/output';
import type { PlaneScale } from '../../../shared/physics/calibration';
import { LEAST_BLOCKS } from './plane-result';

/** Enough bootstrap blocks for an honest error. */
export function checkBlocks(blocks: number, name: string): Check {
  const base = { id: 'slices-enough', figure: blocks, unit: 'blocks' };
  if (blocks >= 20) {
    return { ...base, status: 'pass', sentence: `The errors rest on ${blocks} ${name}.` };
  }
  if (blocks >= LEAST_BLOCKS) {
    const sentence = `The errors rest on ${blocks} ${name} only; 20 or more make them dependable.`;
    return { ...base, status: 'caution', sentence };
  }
  const sentence = `The run holds ${blocks} ${name}, too few to tell an error, so no number is given; at least ${LEAST_BLOCKS} are needed.`;
  return { ...base, status: 'fail', sentence };
}

/** Calibration errors are common to all blocks: no measuring time removes them. */
export function checkCalibration(scale: PlaneScale): Check {
  const percent = 100 * scale.relative;
  const base = { id: 'calibration-known', figure: percent, unit: '%' };
  if (percent === 0) {
    const sentence =
      'The calibration carries no uncertainty, as if it were exact; give the errors of magnification, focal length and wavelength.';
    return { ...base, status: 'caution', sentence };
  }
  const sentence = `The calibration adds ${percent.toFixed(2)} % to every width, common to all blocks and not in the errors quoted.`;
  return { ...base, status: percent <= 10 ? 'pass' : 'caution', sentence };
}
