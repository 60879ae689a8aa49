import type { FrameShape } from './frame-maps';
import { digitReversed, twiddles } from './frame-transform-tables';
import type { FrameWasm } from './frame-wasm';

/** Where the compiled frame maps (frame-maps-wasm.ts) keep what. */

/** A value of a column of transforms: {re, im} of four f32 (two f64) columns. */
export const CELL = 32;
/** Re^2 - Im^2, Re Im, |F|^2 of four columns in f32, and in f64. */
export const SQUARES = 48;
/** Distances that are powers of two would put the same row of all frames into the same cache set. */
export const SKEW = 128;

export interface FrameArraySizes {
  shape: FrameShape;
  columns: number;
  padWidth: number;
  padHeight: number;
  strips: number;
  frameBytes: number;
  batch: number;
  limit: number;
}

/**
 * Lit pixels up to which counting pairs is faster than the transform: 1.5 n^2 pairs a frame against P log2 P. Measured on
 * one core the two are level near 370 lit pixels at 256 x 256 (0.6 %), 190 at 128 x 128 (1.2 %), 98 at 64 x 64 (2.4 %).
 */
export function pairLimit(padWidth: number, padHeight: number): number {
  const padded = padWidth * padHeight;
  return Math.floor(Math.sqrt(PAIR_COST * padded * Math.log2(padded)));
}
const PAIR_COST = 0.035;

/** Places every array and fills the tables. What `release` gave back is not zero, so all that must be is cleared. */
export function placeArrays(wasm: FrameWasm, sizes: FrameArraySizes) {
  const { shape, columns, padWidth, padHeight, strips, frameBytes, batch, limit } = sizes;
  const { width, height } = shape;
  const from = wasm.mark;
  const image = columns * height;
  const downBytes = Math.ceil(height / 4) * 32;
  // Rows below the image are read as zeros up to half the padded height.
  const slotBytes = (padHeight / 2) * columns * 8 + SKEW;
  const cells = (2 * width - 1) * (2 * height - 1);
  // Pair maps: sums from 0 up, and lags to either side of their middle.
  const pad = 2 * width;
  const halfBytes = 8 * width * height * 2;
  const pairsBytes = 2 * halfBytes;
  const listBytes = 12 * (limit + 4);
  const pairs = wasm.place(pairsBytes);
  const at = {
    pairs,
    pairsBytes,
    middle: pairs + halfBytes + halfBytes / 2,
    pad,
    lists: wasm.place((batch + 1) * listBytes),
    listBytes,
    scratch: wasm.place(16 * batch),
    raw: wasm.place(width * height * 8 + 64),
    mask: wasm.place(4 * image),
    slots: wasm.place((batch + 1) * slotBytes),
    slotBytes,
    sum: wasm.place(8 * image),
    sumSquares: wasm.place(8 * image),
    spare: wasm.place(8 * image),
    diagonal: wasm.place(8 * image),
    across: wasm.place(batch * columns * 8),
    down: wasm.place(batch * downBytes),
    downBytes,
    jointX: wasm.place(columns * columns * 8),
    jointY: wasm.place((downBytes / 8) ** 2 * 8),
    twiddlesX: wasm.place(16 * padWidth),
    twiddlesY: wasm.place(16 * padHeight),
    twiddlesX64: wasm.place(32 * padWidth),
    twiddlesY64: wasm.place(32 * padHeight),
    positionsX: wasm.place(4 * padWidth),
    positionsY: wasm.place(4 * padHeight),
    work: wasm.place(Math.max(padWidth, padHeight) * CELL),
    other: wasm.place(padWidth * CELL),
    half: wasm.place((batch + 1) * frameBytes),
    squares: wasm.place(strips * padWidth * SQUARES),
    totals: wasm.place(strips * padWidth * 2 * SQUARES),
    field: wasm.place((padWidth / 2) * padHeight * CELL),
    plus: wasm.place(8 * cells),
    minus: wasm.place(8 * cells),
  };
  wasm.u8(from, wasm.mark - from).fill(0);
  const mask = wasm.i32(at.mask, image);
  for (let y = 0; y < height; y++) {
    for (let x = 0; x < width; x++) mask[y * columns + x] = shape.masked[y * width + x] === 0 ? -1 : 0;
  }
  for (const [single, double, positions, n] of [
    [at.twiddlesX, at.twiddlesX64, at.positionsX, padWidth],
    [at.twiddlesY, at.twiddlesY64, at.positionsY, padHeight],
  ] as const) {
    const table = twiddles(n);
    wasm.f32(single, table.length).set(table);
    wasm.f64(double, table.length).set(table);
    const places = wasm.u32(positions, n);
    for (let k = 0; k < n; k++) places[k] = CELL * digitReversed(k, n);
  }
  return at;
}
