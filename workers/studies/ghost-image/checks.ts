import type { DialValues } from '../../../shared/contracts/dial';
import type { Check } from '../../../shared/contracts/output';
import { numberDial } from '../dials';
import {
  checkAccidentalsAgree,
  checkPairsEnough,
  checkPeakCentred,
  checkPeakFound,
  checkWindowCut,
} from '../peak-checks';
import type { ArmPair } from '../peak-search';
import {
  checkBaseline,
  checkDrift,
  checkExcessNoise,
  checkLiveTime,
  checkMapped,
  checkOrder,
  checkPixels,
  checkSaturation,
} from '../run-checks';
import type { TagCount } from '../tag-count';
import { overlapOf, type Regions } from './regions';

export interface GhostContrast {
  regions: Regions | null;
  /** Net counts per pixel in both regions; null when there is no region. */
  open: number | null;
  closed: number | null;
  /** (open - closed) over its error. */
  z: number | null;
}

export function checkGhostImage(
  count: TagCount,
  arms: ArmPair,
  dials: DialValues,
  net: Float64Array,
  contrast: GhostContrast,
  excess: readonly { id: string; ratio: number }[],
): Check[] {
  const pixels = count.tally.b.masked.filter((mask) => mask === 0).length;
  return [
    checkPeakFound(count),
    // A net count of ten a pixel shows a stencil; three are a hint of one.
    checkPairsEnough(count, 3 * pixels, 10 * pixels),
    checkWindowCut(count),
    checkPeakCentred(count),
    checkAccidentalsAgree(count),
    checkBaseline(count),
    checkImageShows(contrast),
    checkRegions(dials, contrast),
    checkCut(count, net, contrast),
    checkDrift(count, arms),
    checkExcessNoise(excess),
    checkPixels([{ arm: count.tally.b, name: arms.b }]),
    checkSaturation(
      [
        { arm: count.tally.a, name: arms.a },
        { arm: count.tally.b, name: arms.b },
      ],
      count.times,
      numberDial(dials, 'dead.time'),
    ),
    checkOrder(count),
    checkMapped(count),
    checkLiveTime(count),
  ];
}

function checkImageShows({ regions, z }: GhostContrast): Check {
  const base = { id: 'image-shows', unit: 'sigma' };
  if (z === null || regions === null) {
    const sentence = 'There are no counts to tell open pixels from closed ones.';
    return { ...base, status: 'fail', figure: null, sentence };
  }
  const how = regions.drawn ? 'The drawn regions' : 'Open and closed pixels';
  const differ = `${how} differ by ${z.toFixed(1)} standard errors after subtraction`;
  if (z >= 5) return { ...base, status: 'pass', figure: z, sentence: `${differ}.` };
  const sentence = `${differ}, which is not yet an image; measure longer, or check object and imaging.`;
  return { ...base, status: z >= 3 ? 'caution' : 'fail', figure: z, sentence };
}

function checkRegions(dials: DialValues, { regions }: GhostContrast): Check {
  const overlap = overlapOf(dials);
  const base = { id: 'regions-apart', figure: overlap, unit: 'pixels' };
  if (overlap > 0) {
    const sentence = `The open and closed regions share ${overlap} pixels; draw them apart.`;
    return { ...base, status: 'fail', sentence };
  }
  if (regions !== null && !regions.drawn) {
    const sentence =
      'Open and closed pixels were split by the image itself, each half of the run measured with the split of the other. Draw both regions to decide what is compared.';
    return { ...base, status: 'pass', sentence };
  }
  return { ...base, status: 'pass', sentence: 'The open and closed regions share no pixel.' };
}

/** Light along one edge of the array means that the image goes on outside it. */
function checkCut(count: TagCount, net: Float64Array, { open, closed }: GhostContrast): Check {
  const { width, height, masked } = count.tally.b;
  const base = { id: 'image-inside', unit: '%' };
  if (open === null || closed === null || width < 4 || height < 4 || !(open > closed)) {
    const sentence = 'The array or the image is too small to see whether its edge cuts the image.';
    return { ...base, status: 'caution', figure: null, sentence };
  }
  const level = Math.max(...sidesOf(width, height).map((side) => meanOver(side, net, masked)));
  const percent = Math.round((100 * (level - closed)) / (open - closed)) + 0;
  if (percent < 20) {
    const sentence = `The brightest edge of the array holds ${percent} % of the open level: the image lies inside.`;
    return { ...base, status: 'pass', figure: percent, sentence };
  }
  const sentence = `The brightest edge of the array holds ${percent} % of the open level: part of the image may lie outside. Move the image or lower the magnification.`;
  return { ...base, status: 'caution', figure: percent, sentence };
}

/** Pixels of the first and last column and row. */
function sidesOf(width: number, height: number): number[][] {
  const column = (x: number): number[] => Array.from({ length: height }, (_, y) => y * width + x);
  const row = (y: number): number[] => Array.from({ length: width }, (_, x) => y * width + x);
  return [column(0), column(width - 1), row(0), row(height - 1)];
}

function meanOver(pixels: readonly number[], values: Float64Array, masked: Uint8Array): number {
  const good = pixels.filter((pixel) => masked[pixel] === 0);
  return good.reduce((sum, pixel) => sum + values[pixel]!, 0) / Math.max(1, good.length);
}
