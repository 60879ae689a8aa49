import type { MapData } from '../../shared/contracts/output';
import { binCentre, nearestBin } from './axis-geometry';
import { gridOf } from './map-values';
import type { PlotPoint, PlotRegion } from './types';

export interface Bin {
  ix: number;
  iy: number;
}

export function binOf(map: MapData, point: PlotPoint): Bin {
  const { nx, ny } = gridOf(map);
  return { ix: nearestBin(map.axes[0]!, nx, point.x), iy: nearestBin(map.axes[1]!, ny, point.y) };
}

export function centreOf(map: MapData, { ix, iy }: Bin): PlotPoint {
  return { x: binCentre(map.axes[0]!, ix), y: binCentre(map.axes[1]!, iy) };
}

/** The rectangle of whole bins between two corners, edges included: what is drawn is what is counted. */
export function regionBetween(map: MapData, a: Bin, b: Bin): PlotRegion {
  const [first, second] = [centreOf(map, a), centreOf(map, b)];
  const halfX = Math.abs(map.axes[0]!.step || 1) / 2;
  const halfY = Math.abs(map.axes[1]!.step || 1) / 2;
  return {
    x0: Math.min(first.x, second.x) - halfX,
    y0: Math.min(first.y, second.y) - halfY,
    x1: Math.max(first.x, second.x) + halfX,
    y1: Math.max(first.y, second.y) + halfY,
  };
}

/** Bin the cursor goes to, `dx` and `dy` in the direction of rising positions; starts in the middle. */
export function moveBin(map: MapData, from: PlotPoint | null, dx: number, dy: number): Bin {
  const { nx, ny } = gridOf(map);
  if (from === null) return { ix: nx >> 1, iy: ny >> 1 };
  const { ix, iy } = binOf(map, from);
  const clamp = (bin: number, bins: number): number => Math.min(bins - 1, Math.max(0, bin));
  return {
    ix: clamp(ix + dx * Math.sign(map.axes[0]!.step || 1), nx),
    iy: clamp(iy + dy * Math.sign(map.axes[1]!.step || 1), ny),
  };
}
