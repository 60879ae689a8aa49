import type { MapData } from '../../shared/contracts/output';
import { axisSpan, type Span } from './axis-geometry';
import { gridOf } from './map-values';
import type { PlotRect } from './PlotAxes';
import type { Box } from './use-box';

export interface MapView {
  x: Span;
  y: Span;
}

export function fullView(map: MapData): MapView {
  const { nx, ny } = gridOf(map);
  return { x: axisSpan(map.axes[0]!, nx), y: axisSpan(map.axes[1]!, ny) };
}

/** Beyond this ratio of the sides an equal aspect would leave a sliver; the axes then scale each on its own. */
const LARGEST_RATIO = 8;

/** Width over height one unit by one unit should have: 1 for axes in the same unit, null to fill the box. */
function aspectOf(map: MapData, full: MapView): number | null {
  if (map.axes[0]?.unit !== map.axes[1]?.unit) return null;
  const ratio = (full.x[1] - full.x[0]) / (full.y[1] - full.y[0]);
  return ratio > LARGEST_RATIO || ratio < 1 / LARGEST_RATIO ? null : ratio;
}

/** Margins in text sizes: labels and ticks left and below, the colour bar right. */
export const MAP_MARGIN = { left: 5.6, right: 6.2, top: 0.6, bottom: 3.4 };

export function computeMapRect(map: MapData, full: MapView, { width, height, em }: Box): PlotRect {
  const room = {
    width: Math.max(1, width - (MAP_MARGIN.left + MAP_MARGIN.right) * em),
    height: Math.max(1, height - (MAP_MARGIN.top + MAP_MARGIN.bottom) * em),
  };
  const aspect = aspectOf(map, full);
  const plotWidth = aspect === null ? room.width : Math.min(room.width, room.height * aspect);
  const plotHeight = aspect === null ? room.height : plotWidth / aspect;
  // Whole pixels keep hairlines and bins sharp.
  return {
    left: Math.round(MAP_MARGIN.left * em),
    top: Math.round(MAP_MARGIN.top * em),
    width: Math.max(1, Math.floor(plotWidth)),
    height: Math.max(1, Math.floor(plotHeight)),
  };
}

/** From bin indices (left edge of bin 0 at 0) to pixels: x' = sx i + tx, y' = sy j + ty. */
export interface BinTransform {
  sx: number;
  sy: number;
  tx: number;
  ty: number;
}

export function computeBinTransform(map: MapData, view: MapView, rect: PlotRect): BinTransform {
  const [ax, ay] = [map.axes[0]!, map.axes[1]!];
  const kx = rect.width / (view.x[1] - view.x[0]);
  const ky = rect.height / (view.y[1] - view.y[0]);
  const [stepX, stepY] = [ax.step || 1, ay.step || 1];
  return {
    sx: kx * stepX,
    // Positions rise upwards, pixels downwards.
    sy: -ky * stepY,
    tx: rect.left + kx * (ax.start - stepX / 2 - view.x[0]),
    ty: rect.top + rect.height - ky * (ay.start - stepY / 2 - view.y[0]),
  };
}

export function pixelToPoint(
  view: MapView,
  rect: PlotRect,
  px: number,
  py: number,
): { x: number; y: number } {
  return {
    x: view.x[0] + ((px - rect.left) / rect.width) * (view.x[1] - view.x[0]),
    y: view.y[1] - ((py - rect.top) / rect.height) * (view.y[1] - view.y[0]),
  };
}

export function isInside(rect: PlotRect, px: number, py: number): boolean {
  return px >= rect.left && px <= rect.left + rect.width && py >= rect.top && py <= rect.top + rect.height;
}
