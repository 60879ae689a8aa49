/**
 * Counting kept pairs again, for another histogram or other windows. Columns in, the caller's arrays out (doubles that
 * hold whole numbers); all add, and a weight of -1 takes away. O(pairs in the stretch); an empty stretch does nothing.
 */

/** Columns of kept pairs: tau above the start of their bucket, pixels of both arms, ring slot of the slice. */
export interface KeptColumns {
  offset: Uint16Array;
  pixelA: Uint16Array;
  pixelB: Uint16Array;
  slot: Uint8Array;
}

/** Pairs [start, stop) of the columns, those of them with an offset in [lo, hi]. */
export interface KeptStretch {
  pairs: KeptColumns;
  start: number;
  stop: number;
  lo: number;
  hi: number;
}

/** Where a pixel counts: terms of an index that add up to it, one of arm A and one of arm B. */
interface CellTerms {
  /** [xB][xA], [yB][yA]: of arm A the column, of arm B the row times the width. */
  jointX: Int32Array;
  jointY: Int32Array;
  /** y * (wA + wB - 1) + x, of sum and difference coordinate. */
  lag: Int32Array;
  /** 0 for pixels whose pairs are not to count. */
  live: Uint8Array;
}

/** All that follows from the sizes and masks of both arms. */
export interface PairCells {
  a: CellTerms;
  b: CellTerms;
  /** Index of equal coordinates in the difference map. */
  lagCentre: number;
  /** Cells of the joint maps of one slice. */
  cellsX: number;
  cellsY: number;
}

export interface WindowCounts {
  jointX: Float64Array;
  jointY: Float64Array;
  imageA: Float64Array;
  imageB: Float64Array;
  difference: Float64Array;
  sum: Float64Array;
  matrix: Float64Array | null;
}

interface Arm {
  width: number;
  height: number;
  removed: Uint8Array;
}

export function pairCells(a: Arm, b: Arm): PairCells {
  const lagWidth = a.width + b.width - 1;
  return {
    a: cellTerms(a, 1, 1, lagWidth),
    b: cellTerms(b, a.width, a.height, lagWidth),
    lagCentre: (a.height - 1) * lagWidth + a.width - 1,
    cellsX: a.width * b.width,
    cellsY: a.height * b.height,
  };
}

/** Of pixels y * width + x; `stepX` and `stepY` are what one column and one row count in the joint maps. */
function cellTerms(arm: Arm, stepX: number, stepY: number, lagWidth: number): CellTerms {
  const { width, height, removed } = arm;
  const pixels = width * height;
  const jointX = new Int32Array(pixels);
  const jointY = new Int32Array(pixels);
  const lag = new Int32Array(pixels);
  for (let p = 0; p < pixels; p++) {
    const x = p % width;
    const y = (p - x) / width;
    jointX[p] = x * stepX;
    jointY[p] = y * stepY;
    lag[p] = y * lagWidth + x;
  }
  return { jointX, jointY, lag, live: removed.map((gone) => 1 - gone) };
}

/**
 * A stretch into joint maps, images and the matrix. `sliceOfSlot` gives the row of the maps per slice. In order of time
 * neighbours share a slice, so its maps stay in the nearest cache.
 */
export function recountMaps(
  stretch: KeptStretch,
  weight: number,
  sliceOfSlot: Int32Array,
  cells: PairCells,
  out: WindowCounts,
): void {
  const { start, stop, lo, hi } = stretch;
  const { offset, pixelA, pixelB, slot } = stretch.pairs;
  const { cellsX, cellsY } = cells;
  const { jointX, jointY, imageA, imageB, matrix } = out;
  const { jointX: xA, jointY: yA, live: liveA } = cells.a;
  const { jointX: xB, jointY: yB, live: liveB } = cells.b;
  const pixelsA = xA.length;
  const pixelsB = xB.length;
  for (let i = start; i < stop; i++) {
    const tau = offset[i]!;
    if (tau < lo || tau > hi) continue;
    const pA = pixelA[i]!;
    const pB = pixelB[i]!;
    const slice = sliceOfSlot[slot[i]!]!;
    const one = weight * (liveA[pA]! & liveB[pB]!);
    jointX[slice * cellsX + xB[pB]! + xA[pA]!]! += one;
    jointY[slice * cellsY + yB[pB]! + yA[pA]!]! += one;
    imageA[slice * pixelsA + pA]! += one;
    imageB[slice * pixelsB + pB]! += one;
    if (matrix !== null) matrix[pB * pixelsA + pA]! += one;
  }
}

/** A stretch into sum and difference coordinate. */
export function recountLags(stretch: KeptStretch, weight: number, cells: PairCells, out: WindowCounts): void {
  const { start, stop, lo, hi } = stretch;
  const { offset, pixelA, pixelB } = stretch.pairs;
  const { difference, sum } = out;
  const { lagCentre } = cells;
  const { lag: lagA, live: liveA } = cells.a;
  const { lag: lagB, live: liveB } = cells.b;
  for (let i = start; i < stop; i++) {
    const tau = offset[i]!;
    if (tau < lo || tau > hi) continue;
    const pA = pixelA[i]!;
    const pB = pixelB[i]!;
    const one = weight * (liveA[pA]! & liveB[pB]!);
    difference[lagCentre + lagB[pB]! - lagA[pA]!]! += one;
    sum[lagA[pA]! + lagB[pB]!]! += one;
  }
}

/** Sum and difference coordinate anew from the whole matrix [pixelB][pixelA]: O(cells). */
export function lagsOfMatrix(
  matrix: Float64Array,
  cells: PairCells,
  out: Pick<WindowCounts, 'difference' | 'sum'>,
): void {
  const { difference, sum } = out;
  const { lagCentre } = cells;
  const lagA = cells.a.lag;
  const lagB = cells.b.lag;
  difference.fill(0);
  sum.fill(0);
  let at = 0;
  for (let pB = 0; pB < lagB.length; pB++) {
    const atB = lagB[pB]!;
    for (let pA = 0; pA < lagA.length; pA++, at++) {
      const count = matrix[at]!;
      if (count === 0) continue;
      difference[lagCentre + atB - lagA[pA]!]! += count;
      sum[lagA[pA]! + atB]! += count;
    }
  }
}

/**
 * A stretch into bins of `binTick`, whatever its lo and hi; `fromTick` is the start of its bucket above the start of
 * the histogram.
 */
export function recountHistogram(
  { pairs, start, stop }: KeptStretch,
  fromTick: number,
  binTick: number,
  cells: PairCells,
  counts: Float64Array,
): void {
  const { offset, pixelA, pixelB } = pairs;
  const liveA = cells.a.live;
  const liveB = cells.b.live;
  const spanTick = counts.length * binTick;
  const perBin = 1 / binTick;
  for (let i = start; i < stop; i++) {
    const from = fromTick + offset[i]!;
    if (from < 0 || from >= spanTick) continue;
    // Half a tick keeps clear of the edges of the bins, so that the rounded product cannot cross one.
    counts[((from + 0.5) * perBin) | 0]! += liveA[pixelA[i]!]! & liveB[pixelB[i]!]!;
  }
}

/** Counts per tick, from tick `skip` on, joined into bins of `binTick` of them: as many bins as `counts` has. */
export function joinTicks(perTick: Float64Array, skip: number, binTick: number, counts: Float64Array): void {
  let at = skip;
  for (let m = 0; m < counts.length; m++) {
    let count = 0;
    for (const end = at + binTick; at < end; at++) count += perTick[at]!;
    counts[m] = count;
  }
}
