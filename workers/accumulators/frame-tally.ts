import type { Region } from '../../shared/contracts/dial';
import type { FrameTally } from '../../shared/contracts/tally';
import { copyRectangle, type FrameMaps } from '../kernels/frame-maps';
import { addDiagonal, addOuter, projectFrame, subtract } from '../kernels/frame-sums';
import type { Segment } from './frame-part';
import { addInto } from './pair-store';

/**
 * Adds (first first - last last)/2 of every gapless stretch, written (first - last)(first + last)/2 to keep its digits:
 * one transform a stretch and one inverse, by kernels that hold no differences.
 */
export function addEnds(tally: FrameTally, segments: readonly Segment[], openMaps: () => FrameMaps): void {
  const { width, height, jointRegion, joint } = tally;
  const less = new Float64Array(width * height);
  const more = new Float64Array(width * height);
  const vectors = [width, height, width, height].map((length) => new Float64Array(length));
  const [lessX, lessY, moreX, moreY] = vectors as [Float64Array, Float64Array, Float64Array, Float64Array];
  let maps: FrameMaps | null = null;
  for (const { firstImage, lastImage } of segments) {
    subtract(firstImage, lastImage, less);
    // Nothing to correct, and the transform would leave its rounding behind.
    if (less.every((value) => value === 0)) continue;
    more.set(firstImage);
    addInto(more, lastImage);
    addDiagonal(less, more, 0.5, tally.diagonal);
    projectFrame(less, lessX, lessY);
    projectFrame(more, moreX, moreY);
    addOuter(lessX, moreX, 0.5, tally.jointX);
    addOuter(lessY, moreY, 0.5, tally.jointY);
    if (jointRegion !== undefined && joint !== undefined) addTriangle(less, more, width, jointRegion, joint);
    maps ??= openMaps();
    maps.addProduct(less, more);
  }
  if (maps === null) return;
  const { plus, minus } = maps.close();
  addInto(tally.plus, plus);
  addInto(tally.minus, minus);
}

/** The part of the symmetrised product x y / 2 that `FrameTally.joint` holds. */
function addTriangle(
  x: Float64Array,
  y: Float64Array,
  width: number,
  region: Region,
  joint: Float64Array,
): void {
  const pixels = (region.x1 - region.x0 + 1) * (region.y1 - region.y0 + 1);
  const [u, v] = [x, y].map((image) => {
    const inside = new Float64Array(pixels);
    copyRectangle(image, width, region, inside);
    return inside;
  }) as [Float64Array, Float64Array];
  let to = 0;
  for (let i = 0; i < pixels; i++) {
    for (let j = i; j < pixels; j++) joint[to++]! += 0.25 * (u[i]! * v[j]! + u[j]! * v[i]!);
  }
}

/**
 * Normalised frames are summed with a mean of 1 per pixel, because the mean total is known at the end only: this brings
 * a tally back to the counts of a mean frame. Changes the tally and returns it.
 */
export function scaleToMean(tally: FrameTally): FrameTally {
  const open = tally.masked.reduce((n, m) => n + 1 - m, 0);
  const light = tally.blockTotals.reduce((sum, v, b) => sum + v * (tally.blockFrames[b] as number), 0);
  const factor = tally.frames > 0 && open > 0 ? light / tally.frames / open : 1;
  const squared = factor * factor;
  const scaled = (maps: readonly (Float32Array | null)[]): (Float32Array | null)[] =>
    maps.map((map) => map?.map((v) => v * squared) ?? null);
  for (let i = 0; i < tally.sum.length; i++) tally.sum[i]! *= factor;
  const { sumSquares, diagonal, plus, minus, jointX, jointY, joint } = tally;
  for (const map of [sumSquares, diagonal, plus, minus, jointX, jointY, joint ?? []]) {
    for (let i = 0; i < map.length; i++) map[i]! *= squared;
  }
  tally.blockPlus = scaled(tally.blockPlus);
  tally.blockMinus = scaled(tally.blockMinus);
  return tally;
}
