import type { Axis, MapData } from '../../../shared/contracts/output';
import type { FrameTally } from '../../../shared/contracts/tally';

/** A map of a result holds at most 2^22 numbers: 2048 pixels against as many. */
const MOST_PIXELS = 2048;
/** Of the symmetrised consecutive-frame estimator, relative to s_i^2 s_j^2 / F (derived in shared/physics/frame-maps). */
const CONSECUTIVE_VARIANCE = 1.5;

/** Axis of a rectangle's pixels in crystal units, `from` its first pixel. */
export type RegionAxis = (axis: 'x' | 'y', from: number, n: number) => Axis;

/**
 * Pixel-by-pixel joint distribution of a region, G_ij of consecutive frames with the end frames corrected, counts^2 per
 * frame: all pairs [pixel 2][pixel 1] where they fit in a result, the image of the partners of the brightest pixel (the
 * conditional image), and that of the partners of all pixels (their sum). Own pairs i = j are left out, neighbours
 * (crosstalk) are not. Errors are the counting noise of uncorrelated pixels, Var G_ij = 1.5 s_i^2 s_j^2 / (F - 1)
 * (Defienne, Reichert & Fleischer, PRL 120, 203604 (2018) for the estimator; its variance is derived). O(n^2) for n
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
  const variance = Float64Array.from(pixels, (p) => {
    const mean = (tally.sum[p] as number) / Math.max(frames, 1);
    return Math.max((tally.sumSquares[p] as number) / Math.max(frames, 1) - mean * mean, 0);
  });
  const masked = Uint8Array.from(pixels, (p) => tally.masked[p] as number);
  const at = (i: number, j: number): number => {
    const low = Math.min(i, j);
    return per * (joint[low * n - (low * (low - 1)) / 2 + Math.max(i, j) - low] as number);
  };
  const noise = (i: number, j: number): number =>
    Math.sqrt(CONSECUTIVE_VARIANCE * per * (variance[i] as number) * (variance[j] as number));
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
    sigma: Float64Array.from(pixels, (_, j) => noise(brightest, j)),
  };

  const all = variance.reduce((sum, v) => sum + v, 0);
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
    sigma: variance.map((v) => Math.sqrt(CONSECUTIVE_VARIANCE * per * v * (all - v))),
  };

  if (n > MOST_PIXELS) return maps;
  const axis = (which: string): Axis => ({
    label: `pixel of the ${which} photon, row by row`,
    unit: '',
    start: 0,
    step: 1,
  });
  const data = new Float64Array(n * n);
  const sigma = new Float64Array(n * n);
  const left = new Uint8Array(n * n);
  for (let j = 0; j < n; j += 1) {
    for (let i = 0; i < n; i += 1) {
      const c = j * n + i;
      const isOut = i === j || masked[i] === 1 || masked[j] === 1;
      left[c] = isOut ? 1 : 0;
      data[c] = isOut ? 0 : at(i, j);
      sigma[c] = noise(i, j);
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
    sigma,
  };
  return maps;
}
