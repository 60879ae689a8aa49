import type { DialValues, Region } from '../../../shared/contracts/dial';
import type { TagTally } from '../../../shared/contracts/tally';
import { Problem } from '../../../shared/errors/problem';
import { countVariance } from '../../../shared/physics/estimate';
import { otsuThreshold, type RegionMean } from '../../../shared/physics/ghost-image';
import { regionDial } from '../dials';

/** Which pixels count as open and closed in one set of slices. */
export interface Fold {
  /** 1 for slices that are measured with this choice. */
  slices: Uint8Array;
  open: Uint8Array;
  closed: Uint8Array;
}

export interface Regions {
  drawn: boolean;
  folds: Fold[];
}

/**
 * Open and closed pixels. Drawn regions serve all slices. Otherwise the net image is split at Otsu's threshold, and
 * because pixels picked for being bright are bright by chance as well, the split of the even slices is measured on the
 * odd ones and the other way round: noise then cannot flatter the contrast, and a wrongly sorted pixel lowers it. Null
 * when there is nothing to split.
 */
export function findRegions(tally: TagTally, dials: DialValues): Regions | null {
  const { width, height, masked } = tally.b;
  const open = regionDial(dials, 'region.open');
  const closed = regionDial(dials, 'region.closed');
  if (open !== null && closed !== null) {
    const slices = new Uint8Array(tally.slices).fill(1);
    const fold = {
      slices,
      open: pixelsOf(open, width, height, masked),
      closed: pixelsOf(closed, width, height, masked),
    };
    return { drawn: true, folds: [fold] };
  }
  const folds: Fold[] = [];
  for (const parity of [0, 1]) {
    const slices = Uint8Array.from({ length: tally.slices }, (_, k) => (k % 2 === parity ? 1 : 0));
    const chooseOn = slices.map((used) => 1 - used);
    const split = splitImage(netImage(tally, chooseOn), masked);
    if (split === null) return null;
    folds.push({ slices, ...split });
  }
  return { drawn: false, folds };
}

/** @throws Problem `bad-dial` for a region that leaves the array. */
export function assertRegionsFit(dials: DialValues, width: number, height: number): void {
  for (const id of ['region.open', 'region.closed']) {
    const region = regionDial(dials, id);
    if (region === null || (region.x1 < width && region.y1 < height)) continue;
    throw new Problem(
      'bad-dial',
      `The dial "${id}" reaches to pixel (${region.x1}, ${region.y1}), but the array ends at (${width - 1}, ${height - 1}); draw the region inside it.`,
      id,
    );
  }
}

/** Pixels in both drawn regions. */
export function overlapOf(dials: DialValues): number {
  const open = regionDial(dials, 'region.open');
  const closed = regionDial(dials, 'region.closed');
  if (open === null || closed === null) return 0;
  const wide = Math.min(open.x1, closed.x1) - Math.max(open.x0, closed.x0) + 1;
  const high = Math.min(open.y1, closed.y1) - Math.max(open.y0, closed.y0) + 1;
  return Math.max(0, wide) * Math.max(0, high);
}

/** Counts per pixel of one region in each slice, in the window and in all shifted windows together. */
export interface RegionSlices {
  raw: Float64Array;
  shifted: Float64Array;
  /** Variances of the sums of `raw` and of `shifted` over all slices. */
  rawVariance: number;
  shiftedVariance: number;
  pixels: number;
}

export function regionSlices(tally: TagTally, regions: Regions, side: 'open' | 'closed'): RegionSlices {
  const pixels = tally.b.width * tally.b.height;
  const result: RegionSlices = {
    raw: new Float64Array(tally.slices),
    shifted: new Float64Array(tally.slices),
    rawVariance: 0,
    shiftedVariance: 0,
    pixels: 0,
  };
  for (const fold of regions.folds) {
    const inside = [...fold[side].keys()].filter((pixel) => fold[side][pixel] === 1);
    const n = inside.length;
    if (n === 0) continue;
    result.pixels += n / regions.folds.length;
    let [raw, shifted] = [0, 0];
    for (let k = 0; k < tally.slices; k++) {
      if (fold.slices[k] === 0) continue;
      let [rawHere, shiftedHere] = [0, 0];
      for (const pixel of inside) {
        rawHere += tally.prompt.imageB[k * pixels + pixel]!;
        shiftedHere += tally.shifted.imageB[k * pixels + pixel]!;
      }
      result.raw[k] = rawHere / n;
      result.shifted[k] = shiftedHere / n;
      raw += rawHere;
      shifted += shiftedHere;
    }
    result.rawVariance += countVariance(raw) / n ** 2;
    result.shiftedVariance += countVariance(shifted) / n ** 2;
  }
  return result;
}

/** Means over the whole run, for `windows` shifted windows. */
export function regionMean(slices: RegionSlices, windows: number): RegionMean {
  let raw = 0;
  let shifted = 0;
  for (let k = 0; k < slices.raw.length; k++) {
    raw += slices.raw[k]!;
    shifted += slices.shifted[k]!;
  }
  return {
    raw,
    rawVariance: slices.rawVariance,
    accidentals: shifted / windows,
    accidentalsVariance: slices.shiftedVariance / windows ** 2,
  };
}

/** Raw minus mean shifted image over the marked slices. */
export function netImage(tally: TagTally, slices: Uint8Array): Float64Array {
  const pixels = tally.b.width * tally.b.height;
  const windows = Math.max(1, tally.window.shiftsTick.length);
  const image = new Float64Array(pixels);
  for (let k = 0; k < tally.slices; k++) {
    if (slices[k] === 0) continue;
    for (let pixel = 0; pixel < pixels; pixel++) {
      const at = k * pixels + pixel;
      image[pixel]! += tally.prompt.imageB[at]! - tally.shifted.imageB[at]! / windows;
    }
  }
  return image;
}

function splitImage(
  image: Float64Array,
  masked: Uint8Array,
): { open: Uint8Array; closed: Uint8Array } | null {
  const threshold = otsuThreshold(image.filter((_, pixel) => masked[pixel] === 0));
  if (threshold === null) return null;
  const open = Uint8Array.from(image, (value, pixel) => (masked[pixel] === 0 && value > threshold ? 1 : 0));
  const closed = Uint8Array.from(image, (value, pixel) =>
    masked[pixel] === 0 && value <= threshold ? 1 : 0,
  );
  return { open, closed };
}

function pixelsOf(region: Region, width: number, height: number, masked: Uint8Array): Uint8Array {
  const pixels = new Uint8Array(width * height);
  for (let y = region.y0; y <= Math.min(region.y1, height - 1); y++) {
    for (let x = region.x0; x <= Math.min(region.x1, width - 1); x++) {
      if (masked[y * width + x] === 0) pixels[y * width + x] = 1;
    }
  }
  return pixels;
}
