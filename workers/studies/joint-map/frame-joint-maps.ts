import type { Axis, MapData } from '../../../shared/contracts/output';
import type { FrameTally } from '../../../shared/contracts/tally';

/** All pairs of 40 x 40 pixels are 27 MB of a result, which is refused from 64 MB on when it is saved. */
export const MOST_PAIRED_PIXELS = 1600;
/** Of the symmetrised consecutive-frame estimator, relative to s_i^2 s_j^2 / F (derived in shared/physics/frame-maps). */
const CONSECUTIVE_VARIANCE = 1.5;

/** Axis of a rectangle's pixels in crystal units, `from` its first pixel. */
export type RegionAxis = (axis: 'x' | 'y', from: number, n: number) => Axis;

/**
 * Pixel-by-pixel joint distribution of a region, G_ij of consecutive frames with the end frames corrected, counts^2 per
 * frame: all pairs [pixel 2][pixel 1] where they fit in a result, the image of the partners of the brightest pixel (the
 * conditional image), and that of the partners of all pixels (their sum). Own pairs i = j are left out, neighbours
 * (crosstalk) are not. Errors, given for the images, are the counting noise of uncorrelated pixels: Var G_ij =
 * 1.5 s_i^2 s_j^2 / (F - 1) + (m_i^2 s_j^2 + m_j^2 s_i^2) / [2 (F - 1)^2], m the means; the second part is that of the two
 * end frames and counts where a level is large or many pixels are summed. Defienne, Reichert & Fleischer, PRL 120, 203604
 * (2018) for the estimator; its variance is derived. O(n^2) for n
 * pixels. Empty without a region.
 */
export function frameJointMaps(tally: FrameTally, axisOf: RegionAxis): Record<string, MapData> {
  const { joint, jointRegion: region, frames } = tally;
  if (joint === undefined || region === undefined) return {};
  const wide = region.x1 - region.x0 + 1;
  const high = region.y1 - region.y0 + 1;
  const n = wide * high;
  const per = 1 / Math.max(frames - 1, 1);
  const pixels = Array.from(
    { length: n },
    (_, i) => (region.y0 + Math.floor(i / wide)) * tally.width + region.x0 + (i % wide),
  );
  const mean = Float64Array.from(pixels, (p) => (tally.sum[p] as number) / Math.max(frames, 1));
  const variance = Float64Array.from(pixels, (p, i) =>
    Math.max((tally.sumSquares[p] as number) / Math.max(frames, 1) - (mean[i] as number) ** 2, 0),
  );
  const masked = Uint8Array.from(pixels, (p) => tally.masked[p] as number);
  const at = (i: number, j: number): number => {
    const low = Math.min(i, j);
    return per * (joint[low * n - (low * (low - 1)) / 2 + Math.max(i, j) - low] as number);
  };
  /** Of the sum of pixel i with others, whose means and variances add up to what is given. */
  const noise = (i: number, means: number, variances: number): number => {
    const own = variance[i] as number;
    const ends = means * means * own + (mean[i] as number) ** 2 * variances;
    return Math.sqrt(per * (CONSECUTIVE_VARIANCE * own * variances + (per * ends) / 2));
  };
  const image = {
    shape: [high, wide],
    axes: [axisOf('x', region.x0, wide), axisOf('y', region.y0, high)],
    unit: 'counts^2',
    scale: 'signed' as const,
  };
  const maps: Record<string, MapData> = {};

  const brightest = pixels.reduce(
    (best, p, i) =>
      masked[i] === 0 && (tally.sum[p] as number) > (tally.sum[pixels[best] as number] as number) ? i : best,
    Math.max(masked.indexOf(0), 0),
  );
  const chosen = pixels[brightest] as number;
  maps['conditional.image'] = {
    label: `Partners of pixel (${chosen % tally.width}, ${Math.floor(chosen / tally.width)}), the brightest`,
    ...image,
    data: Float64Array.from(pixels, (_, j) => (j === brightest ? 0 : at(brightest, j))),
    masked: masked.map((m, j) => (j === brightest ? 1 : m)),
    sigma: Float64Array.from(pixels, (_, j) => noise(brightest, mean[j] as number, variance[j] as number)),
  };

  const total = (values: Float64Array): number => values.reduce((sum, v) => sum + v, 0);
  const [means, variances] = [total(mean), total(variance)];
  const partners = new Float64Array(n);
  for (let i = 0; i < n; i += 1) {
    for (let j = i + 1; j < n; j += 1) {
      const value = at(i, j);
      partners[i] = (partners[i] as number) + value;
      partners[j] = (partners[j] as number) + value;
    }
  }
  maps['partners.image'] = {
    label: 'Covariance with all other pixels of the region',
    ...image,
    data: partners,
    masked: masked.slice(),
    sigma: variance.map((v, i) => noise(i, means - (mean[i] as number), variances - v)),
  };

  if (n > MOST_PAIRED_PIXELS) return maps;
  const axis = (which: string): Axis => ({
    label: `pixel of the ${which} photon, row by row`,
    unit: '',
    start: 0,
    step: 1,
  });
  const data = new Float64Array(n * n);
  const left = new Uint8Array(n * n);
  for (let j = 0; j < n; j += 1) {
    for (let i = 0; i < n; i += 1) {
      const c = j * n + i;
      const isOut = i === j || masked[i] === 1 || masked[j] === 1;
      left[c] = isOut ? 1 : 0;
      data[c] = isOut ? 0 : at(i, j);
    }
  }
  maps['joint.full'] = {
    label: `Joint distribution of ${wide} x ${high} pixels`,
    shape: [n, n],
    axes: [axis('first'), axis('second')],
    unit: 'counts^2',
    scale: 'signed',
    data,
    masked: left,
  };
  return maps;
}
