import type { MapData } from '../../shared/contracts/output';
import type { BinTransform } from './map-layout';
import { gridOf, isBlank } from './map-values';

/** One path over the bins without a value, runs along a row joined, in pixels. Empty when there are none. */
export function buildBlankPath(map: MapData, t: BinTransform): string {
  const { nx, ny } = gridOf(map);
  const parts: string[] = [];
  for (let iy = 0; iy < ny; iy++) {
    for (let ix = 0; ix < nx; ix++) {
      if (!isBlank(map, iy * nx + ix)) continue;
      const from = ix;
      while (ix + 1 < nx && isBlank(map, iy * nx + ix + 1)) ix++;
      const [x0, y0] = [t.tx + t.sx * from, t.ty + t.sy * iy];
      parts.push(`M${x0} ${y0}h${t.sx * (ix + 1 - from)}v${t.sy}H${x0}Z`);
    }
  }
  return parts.join('');
}

/** Distance between hatch lines in CSS pixels, the same on SVG and canvas. */
export const HATCH_PX = 5;

/** Draws 45 degree lines over the whole canvas, `ratio` device pixels to a CSS pixel. */
export function drawHatch(context: CanvasRenderingContext2D, colour: string, ratio: number): void {
  const { width, height } = context.canvas;
  const pitch = HATCH_PX * ratio;
  context.strokeStyle = colour;
  context.lineWidth = ratio;
  context.beginPath();
  for (let x = -height; x < width; x += pitch) {
    context.moveTo(x, 0);
    context.lineTo(x + height, height);
  }
  context.stroke();
}
