import type { MapData } from '../../shared/contracts/output';
import { type ColourScale, paletteIndex } from './colour-scale';
import { drawHatch } from './hatch';
import type { BinTransform } from './map-layout';
import { gridOf, isBlank } from './map-values';
import type { PlotRect } from './PlotAxes';
import { type Palette, SCALE_SIZE } from './palettes';

/** Bins painted before the page is given a chance to do something else: about a millisecond. */
const STEP_BINS = 2 ** 17;

/** One pixel a bin, row 0 first; blank bins stay transparent. `out` holds nx * ny pixels. */
export function* paintPixels(
  map: MapData,
  scale: ColourScale,
  palette: Palette,
  out: Uint32Array,
): Generator<void> {
  // Linear scales take no logarithm and no call a bin.
  const factor = (SCALE_SIZE - 1) / (scale.hi - scale.lo);
  const { pixels } = palette;
  const { data, masked } = map;
  const { log, lo } = scale;
  for (let from = 0; from < out.length; from += STEP_BINS) {
    const to = Math.min(out.length, from + STEP_BINS);
    for (let i = from; i < to; i++) {
      const value = data[i]!;
      if (Number.isNaN(value) || (masked !== undefined && masked[i] !== 0)) {
        out[i] = 0;
        continue;
      }
      const place = log
        ? paletteIndex(scale, value)
        : Math.min(SCALE_SIZE - 1, Math.max(0, Math.round((value - lo) * factor)));
      out[i] = pixels[place]!;
    }
    yield;
  }
}

/** Opaque where a bin is blank. */
function* paintBlanks(map: MapData, out: Uint32Array): Generator<void> {
  for (let from = 0; from < out.length; from += STEP_BINS) {
    const to = Math.min(out.length, from + STEP_BINS);
    for (let i = from; i < to; i++) out[i] = isBlank(map, i) ? 0xff000000 : 0;
    yield;
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

/** A map at one pixel a bin, ready to be drawn at any zoom. */
export interface Raster {
  image: HTMLCanvasElement | null;
  /** Opaque where a bin is blank, or null when none is. */
  blank: HTMLCanvasElement | null;
}

/** Paints a map step by step; `onDone` gets it at the end. */
export function* paintRaster(
  map: MapData,
  scale: ColourScale,
  palette: Palette,
  blanks: number,
  onDone: (raster: Raster) => void,
): Generator<void> {
  const { nx, ny } = gridOf(map);
  const pixels = new Uint32Array(nx * ny);
  yield* paintPixels(map, scale, palette, pixels);
  const image = imageSurface(nx, ny, pixels)?.canvas ?? null;
  if (blanks === 0) return onDone({ image, blank: null });
  yield;
  const opaque = new Uint32Array(nx * ny);
  yield* paintBlanks(map, opaque);
  onDone({ image, blank: imageSurface(nx, ny, opaque)?.canvas ?? null });
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
