import {
  contrastToNoise,
  ghostContrastToNoise,
  ghostVisibility,
  visibilityOf,
} from '../../../shared/physics/ghost-image';
import type { Measured } from '../quantities';
import { type RegionSlices, regionMean } from './regions';

/** Columns of a resample for the two regions, in this order. */
export function regionColumns(open: RegionSlices, closed: RegionSlices): Float64Array[] {
  return [open.raw, open.shifted, closed.raw, closed.shifted];
}

/**
 * Visibility and CNR, raw and net. `first` is where the region columns begin in a resample. Absent when a region has no
 * pixel or no count.
 */
export function contrastOf(
  open: RegionSlices,
  closed: RegionSlices,
  windows: number,
  drawn: boolean,
  first: number,
): Measured[] {
  const o = regionMean(open, windows);
  const c = regionMean(closed, windows);
  if (open.pixels === 0 || closed.pixels === 0 || !(o.raw + c.raw > 0)) return [];
  const regions = drawn
    ? 'regions as drawn'
    : 'regions split by the image with accidentals subtracted, chosen on half of the slices and measured on the other';
  const levels = (t: readonly number[], net: boolean): [number, number] => {
    const off = net ? 1 / windows : 0;
    return [t[first]! - t[first + 1]! * off, t[first + 2]! - t[first + 3]! * off];
  };
  return [false, true].flatMap((net) => {
    const what = net ? 'accidentals subtracted' : 'nothing subtracted';
    const suffix = net ? 'net' : 'raw';
    const shared = { unit: '1', n: Math.round(o.raw * open.pixels + c.raw * closed.pixels) };
    return [
      {
        ...shared,
        id: `visibility.${suffix}`,
        estimate: ghostVisibility(o, c, net),
        method: `(open - closed)/(open + closed) of mean counts per pixel, ${what}, ${regions}`,
        statistic: (t: readonly number[]) => visibilityOf(...levels(t, net)),
      },
      {
        ...shared,
        id: `cnr.${suffix}`,
        estimate: ghostContrastToNoise(o, c, windows, net),
        method: `per pixel, (open - closed) over the Poisson noise of both, ${what}, ${regions}`,
        statistic: (t: readonly number[]) => {
          const extra = net ? (t[first + 1]! + t[first + 3]!) / windows ** 2 : 0;
          return contrastToNoise(...levels(t, net), t[first]! + t[first + 2]! + extra);
        },
      },
    ];
  });
}
