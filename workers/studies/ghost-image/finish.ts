import type { DialValues } from '../../../shared/contracts/dial';
import type { StudyOutput } from '../../../shared/contracts/output';
import type { TagTally } from '../../../shared/contracts/tally';
import { checkClock, clockQuantities } from '../clock';
import { LOOK_RESAMPLES, numberDial } from '../dials';
import { formatFigure } from '../format-figure';
import { type ArmPair, describeArms } from '../peak-search';
import { listQuantities, settingQuantity } from '../quantities';
import { resampleSlices } from '../resample-slices';
import type { Chosen, ClockFacts } from '../study';
import { countTags, pairedImage, type TagCount } from '../tag-count';
import { chosenDials } from '../tag-main';
import { histogramMap, pixelMap, rateMap } from '../tag-maps';
import {
  accidentalsOf,
  carOf,
  coincidencesOf,
  heraldingOf,
  peakOf,
  singlesOf,
  sliceColumns,
} from '../tag-numbers';
import { checkGhostImage, type GhostContrast } from './checks';
import { contrastOf, regionColumns } from './numbers';
import { findRegions, type RegionSlices, type Regions, regionMean, regionSlices } from './regions';

export interface GhostImageRequest {
  tally: TagTally;
  /** Arm A is the bucket, arm B the array. */
  arms: ArmPair;
  dials: DialValues;
  chosen: Chosen;
  clock?: ClockFacts | undefined;
  seed: number;
  partial: boolean;
}

export function finishGhostImage(request: GhostImageRequest): StudyOutput {
  const { tally, arms, dials, chosen, clock, seed, partial } = request;
  const count = countTags(tally);
  const regions = findRegions(tally, dials);
  const sides = regions && {
    open: regionSlices(tally, regions, 'open'),
    closed: regionSlices(tally, regions, 'closed'),
  };
  const columns = sliceColumns(count);
  const regionFirst = columns.length;
  if (sides !== null) columns.push(...regionColumns(sides.open, sides.closed));
  const draws = resampleSlices(columns, partial ? LOOK_RESAMPLES : numberDial(dials, 'resamples'), seed);
  const list = listQuantities(
    [
      ...(sides === null
        ? []
        : contrastOf(sides.open, sides.closed, count.shifts, regions?.drawn === true, regionFirst)),
      ...singlesOf(count, arms),
      ...peakOf(count),
      ...coincidencesOf(count),
      ...accidentalsOf(count),
      carOf(count),
      heraldingOf(count, 'b', arms, numberDial(dials, 'dark.bucket')),
    ],
    draws,
    tally.slices,
  );
  const images = imagesOf(count);
  const contrast = contrastFound(regions, sides, count.shifts);
  return {
    study: 'ghost-image',
    quantities: {
      ...list.quantities,
      ...clockQuantities(clock),
      'window.width': settingQuantity(
        count.windowPs,
        'ps',
        'full width, whole ticks, both ends counted',
        count.inWindow,
      ),
    },
    verdicts: {},
    checks: [...checkGhostImage(count, arms, dials, images.net, contrast, list.excess), ...checkClock(clock)],
    maps: {
      'image.net': {
        ...pixelMap('Ghost image, accidentals subtracted', tally.b, images.net, images.netSigma, arms.b),
        scale: 'signed',
      },
      'image.raw': pixelMap('Ghost image, raw', tally.b, images.raw, images.raw.map(Math.sqrt), arms.b),
      'image.singles': pixelMap(
        'Array alone: all its tags',
        tally.b,
        tally.b.singles,
        tally.b.singles.map(Math.sqrt),
        arms.b,
      ),
      'delay.histogram': histogramMap(count),
      [`rates.${arms.a}`]: rateMap(count, 'a', arms.a),
      [`rates.${arms.b}`]: rateMap(count, 'b', arms.b),
    },
    chosen: chosenDials(dials, chosen),
    statement: stateGhostImage(count, arms, regions),
  };
}

/** Raw and net image with Poisson errors; the subtracted accidentals add theirs. */
function imagesOf(count: TagCount): { raw: Float64Array; net: Float64Array; netSigma: Float64Array } {
  const { tally, shifts } = count;
  const pixels = tally.b.width * tally.b.height;
  const raw = pairedImage(tally.prompt, 'B', pixels);
  const shifted = pairedImage(tally.shifted, 'B', pixels);
  return {
    raw,
    net: raw.map((value, pixel) => value - shifted[pixel]! / shifts),
    netSigma: raw.map((value, pixel) => Math.sqrt(value + shifted[pixel]! / shifts ** 2)),
  };
}

function contrastFound(
  regions: Regions | null,
  sides: { open: RegionSlices; closed: RegionSlices } | null,
  windows: number,
): GhostContrast {
  if (regions === null || sides === null || sides.open.pixels === 0 || sides.closed.pixels === 0) {
    return { regions, open: null, closed: null, z: null };
  }
  const open = regionMean(sides.open, windows);
  const closed = regionMean(sides.closed, windows);
  const variance =
    open.rawVariance + open.accidentalsVariance + closed.rawVariance + closed.accidentalsVariance;
  const levels = { open: open.raw - open.accidentals, closed: closed.raw - closed.accidentals };
  const z = variance > 0 ? (levels.open - levels.closed) / Math.sqrt(variance) : null;
  return { regions, ...levels, z };
}

function stateGhostImage(count: TagCount, arms: ArmPair, regions: Regions | null): string {
  const { windowPs, windowCentrePs, shifts, seconds } = count;
  const compared =
    regions === null
      ? 'There were no counts to compare open with closed pixels.'
      : regions.drawn
        ? 'Visibility and CNR compare the two regions that were drawn.'
        : 'Visibility and CNR compare pixels above and below the Otsu threshold of the image with accidentals subtracted, chosen on half of the slices of time and measured on the other half, so that the choice does not flatter them; a pixel sorted wrongly lowers them.';
  return [
    `Ghost image of what the bucket saw, from tags of the ${describeArms(arms)} arms over ${formatFigure(seconds)} s: array tags paired with a bucket tag inside a window of ${formatFigure(windowPs)} ps full width centred on ${formatFigure(windowCentrePs)} ps.`,
    `Accidentals subtracted are the mean image of ${shifts} shifted windows; raw numbers are given beside those with accidentals subtracted.`,
    compared,
    'CNR is per pixel with Poisson noise; a region of n pixels has sqrt(n) times as much. Assumed: no flat field, no correction for dead time or afterpulsing. The array alone (singles) and the bucket alone must show no image; a ghost image by itself does not prove entanglement.',
  ].join(' ');
}
