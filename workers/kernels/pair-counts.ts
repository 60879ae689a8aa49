/** Counting kernels fed by columns of selected pairs. All add to the caller's array; counts are whole numbers. */

/** Pairs that fell into one window, with the ring slot of their slice and the pixel coordinates of both tags. */
export interface PairColumns {
  slot: Int32Array;
  pixelA: Int32Array;
  pixelB: Int32Array;
  xA: Int32Array;
  yA: Int32Array;
  xB: Int32Array;
  yB: Int32Array;
}

export function createPairColumns(capacity: number): PairColumns {
  return {
    slot: new Int32Array(capacity),
    pixelA: new Int32Array(capacity),
    pixelB: new Int32Array(capacity),
    xA: new Int32Array(capacity),
    yA: new Int32Array(capacity),
    xB: new Int32Array(capacity),
    yB: new Int32Array(capacity),
  };
}

/** out[slot] += 1 */
export function countSlots(slot: Int32Array, count: number, out: Float64Array): void {
  for (let i = 0; i < count; i++) out[slot[i]!]! += 1;
}

/** out[slot][row][column] += 1 for maps of `cells` values, `width` columns: joint maps and images. */
export function countCells(
  slot: Int32Array,
  row: Int32Array,
  column: Int32Array,
  count: number,
  width: number,
  cells: number,
  out: Float64Array,
): void {
  for (let i = 0; i < count; i++) out[slot[i]! * cells + row[i]! * width + column[i]!]! += 1;
}

/** out[pixelB][pixelA] += 1 */
export function countMatrix(pairs: PairColumns, count: number, pixelsA: number, out: Float64Array): void {
  const { pixelA, pixelB } = pairs;
  for (let i = 0; i < count; i++) out[pixelB[i]! * pixelsA + pixelA[i]!]! += 1;
}

/** out[yB - yA + hA - 1][xB - xA + wA - 1] += 1, rows of wA + wB - 1. */
export function countDifference(
  pairs: PairColumns,
  count: number,
  widthA: number,
  heightA: number,
  widthB: number,
  out: Float64Array,
): void {
  const { xA, yA, xB, yB } = pairs;
  const width = widthA + widthB - 1;
  const centre = (heightA - 1) * width + widthA - 1;
  for (let i = 0; i < count; i++) out[centre + (yB[i]! - yA[i]!) * width + xB[i]! - xA[i]!]! += 1;
}

/** out[yA + yB][xA + xB] += 1, rows of wA + wB - 1. */
export function countSum(
  pairs: PairColumns,
  count: number,
  widthA: number,
  widthB: number,
  out: Float64Array,
): void {
  const { xA, yA, xB, yB } = pairs;
  const width = widthA + widthB - 1;
  for (let i = 0; i < count; i++) out[(yA[i]! + yB[i]!) * width + xA[i]! + xB[i]!]! += 1;
}
