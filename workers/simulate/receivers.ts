import type { Receiver } from '../../shared/contracts/scenario';
import { createRandom } from '../../shared/util/random';

/** Intervals of one axis, um, that lead to a bin; null where nothing is detected. */
export interface Bins {
  low: Float64Array;
  high: Float64Array;
}

/** Active intervals of a receiver's columns (or rows): pixels of an array, cells of a stencil. */
export function binsOf(receiver: Receiver, axis: 'x' | 'y'): Bins {
  const count = axis === 'x' ? columnsOf(receiver) : rowsOf(receiver);
  const pitch = receiver.kind === 'array' ? receiver.pitchUm : receiver.stencil.cellUm;
  const side = receiver.kind === 'array' ? pitch * Math.sqrt(receiver.fill) : pitch;
  const shift = receiver.kind === 'array' ? receiver.axisUm[axis === 'x' ? 0 : 1] : 0;
  return evenBins(count, pitch, side, shift);
}

export function evenBins(count: number, pitch: number, side: number, shift: number): Bins {
  const low = new Float64Array(count);
  const high = new Float64Array(count);
  for (let i = 0; i < count; i++) {
    const centre = (i - (count - 1) / 2) * pitch - shift;
    low[i] = centre - side / 2;
    high[i] = centre + side / 2;
  }
  return { low, high };
}

export function columnsOf(receiver: Receiver): number {
  return receiver.kind === 'array' ? receiver.width : (receiver.stencil.rows[0]?.length ?? 0);
}

export function rowsOf(receiver: Receiver): number {
  return receiver.kind === 'array' ? receiver.height : receiver.stencil.rows.length;
}

/** 1 where a cell (row-major) leads to a click: all pixels of an array but the dead ones, the open cells of a stencil. */
export function openCells(receiver: Receiver): Uint8Array {
  const columns = columnsOf(receiver);
  const open = new Uint8Array(columns * rowsOf(receiver));
  if (receiver.kind === 'array') {
    open.fill(1);
    for (const pixel of receiver.deadPixels) open[pixel] = 0;
    return open;
  }
  receiver.stencil.rows.forEach((row, y) => {
    for (let x = 0; x < columns; x++) open[y * columns + x] = row[x] === '.' ? 1 : 0;
  });
  return open;
}

/** Fixed per-pixel delays of an array, ps; the same for every seed of the source, so that runs can be compared. */
export function pixelSkewPs(receiver: Receiver): Float64Array {
  if (receiver.kind === 'bucket') return new Float64Array(1);
  const random = createRandom(0x5ce3 + receiver.firstChannel);
  return Float64Array.from({ length: receiver.width * receiver.height }, () =>
    receiver.skewPs === 0 ? 0 : receiver.skewPs * random.normal(),
  );
}

/** Which bin a position falls in: index on an even grid of `pitch`, -1 outside or on a dead strip between pixels. */
export function binAt(positionUm: number, count: number, pitch: number, side: number, shift: number): number {
  const place = (positionUm + shift) / pitch + count / 2;
  const index = Math.floor(place);
  if (!(index >= 0 && index < count)) return -1;
  return Math.abs(place - index - 0.5) * pitch <= side / 2 ? index : -1;
}

/** Local pixel (0 for a bucket) that a photon at (x, y) fires, or -1. */
export function createLanding(receiver: Receiver): (xUm: number, yUm: number) => number {
  const columns = columnsOf(receiver);
  const rows = rowsOf(receiver);
  const open = openCells(receiver);
  const isArray = receiver.kind === 'array';
  const pitch = isArray ? receiver.pitchUm : receiver.stencil.cellUm;
  const side = isArray ? pitch * Math.sqrt(receiver.fill) : pitch;
  const [shiftX, shiftY] = isArray ? receiver.axisUm : [0, 0];
  return (xUm, yUm) => {
    const x = binAt(xUm, columns, pitch, side, shiftX);
    const y = binAt(yUm, rows, pitch, side, shiftY);
    if (x < 0 || y < 0) return -1;
    const cell = y * columns + x;
    if (open[cell] === 0) return -1;
    return isArray ? cell : 0;
  };
}
