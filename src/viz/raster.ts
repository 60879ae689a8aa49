import type { MapData } from '../../shared/contracts/output';
import { type ColourScale, paletteIndex } from './colour-scale';
import { drawHatch } from './hatch';
import type { BinTransform } from './map-layout';
import { gridOf, isBlank } from './map-values';
import type { PlotRect } from './PlotAxes';
import { type Palette, SCALE_SIZE } from './palettes';

/** One pixel a bin, row 0 first; blank bins stay transparent. `out` holds nx * ny pixels. */
export function paintPixels(map: MapData, scale: ColourScale, palette: Palette, out: Uint32Array): void {
  // Linear scales take no logarithm and no call a bin.
  const factor = (SCALE_SIZE - 1) / (scale.hi - scale.lo);
  const { pixels } = palette;
  for (let i = 0; i < out.length; i++) {
    if (isBlank(map, i)) {
      out[i] = 0;
      continue;
    }
    const value = map.data[i]!;
    const place = scale.log
      ? paletteIndex(scale, value)
      : Math.min(SCALE_SIZE - 1, Math.max(0, Math.round((value - scale.lo) * factor)));
    out[i] = pixels[place]!;
  }
}

function surface(width: number, height: number): CanvasRenderingContext2D | null {
  const canvas = document.createElement('canvas');
  canvas.width = width;
  canvas.height = height;
  return canvas.getContext('2d');
}

function imageSurface(
  nx: number,
  ny: number,
  pixels: Uint32Array<ArrayBuffer>,
): CanvasRenderingContext2D | null {
  const context = surface(nx, ny);
  context?.putImageData(new ImageData(new Uint8ClampedArray(pixels.buffer), nx, ny), 0, 0);
  return context;
}

/** The map at one pixel a bin, ready to be drawn at any zoom. */
export function buildImage(map: MapData, scale: ColourScale, palette: Palette): HTMLCanvasElement | null {
  const { nx, ny } = gridOf(map);
  const pixels = new Uint32Array(nx * ny);
  paintPixels(map, scale, palette, pixels);
  return imageSurface(nx, ny, pixels)?.canvas ?? null;
}

/** Opaque where a bin is blank, or null when none is. */
export function buildBlankImage(map: MapData, blank: number): HTMLCanvasElement | null {
  if (blank === 0) return null;
  const { nx, ny } = gridOf(map);
  const pixels = new Uint32Array(nx * ny);
  for (let i = 0; i < pixels.length; i++) pixels[i] = isBlank(map, i) ? 0xff000000 : 0;
  return imageSurface(nx, ny, pixels)?.canvas ?? null;
}

export interface RasterFrame {
  rect: PlotRect;
  transform: BinTransform;
  /** Device pixels to a CSS pixel. */
  ratio: number;
  hatchColour: string;
}

function place(context: CanvasRenderingContext2D, image: HTMLCanvasElement, frame: RasterFrame): void {
  const { transform: t, rect, ratio } = frame;
  context.setTransform(
    t.sx * ratio,
    0,
    0,
    t.sy * ratio,
    (t.tx - rect.left) * ratio,
    (t.ty - rect.top) * ratio,
  );
  // Bins larger than a pixel keep sharp edges; smaller ones are averaged, or thin structures would drop out.
  context.imageSmoothingEnabled = Math.abs(t.sx * ratio) < 1 || Math.abs(t.sy * ratio) < 1;
  context.drawImage(image, 0, 0);
  context.setTransform(1, 0, 0, 1, 0, 0);
}

export function drawRaster(
  context: CanvasRenderingContext2D,
  image: HTMLCanvasElement,
  blank: HTMLCanvasElement | null,
  frame: RasterFrame,
): void {
  const { width, height } = context.canvas;
  context.setTransform(1, 0, 0, 1, 0, 0);
  context.clearRect(0, 0, width, height);
  place(context, image, frame);
  const lines = blank === null ? null : surface(width, height);
  if (blank === null || lines === null) return;
  drawHatch(lines, frame.hatchColour, frame.ratio);
  lines.globalCompositeOperation = 'destination-in';
  place(lines, blank, frame);
  context.drawImage(lines.canvas, 0, 0);
}
