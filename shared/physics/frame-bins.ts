import type { FrameMap } from './frame-maps';
import type { CellGrid, PeakShape } from './gaussian-cells';

/** Rectangle of map bins. */
export interface MapRegion {
  x: number;
  y: number;
  nx: number;
  ny: number;
}

/**
 * A cut-out of a map in cells of `side` x `side` bins, what is fitted: a broad peak is as well known from coarse cells, at
 * a fraction of the time and memory. Cells hold sums over the bins that are not blocked.
 */
export interface CoarseCells {
  side: number;
  region: MapRegion;
  /** Cells in units of their own side; lag or index sum 0 is at 0. */
  grid: CellGrid;
  /** Sum over the open bins of every cell; `at` gives the value of a map bin. */
  sum(at: (bin: number) => number): Float64Array;
  /** Number of open bins. */
  open: Float64Array;
}

/** Cells along the longer side of a cut-out beyond which it is fitted in coarser ones. */
const MOST_CELLS = 128;
/** Standard deviations that a cell's side may have at most: averaging then changes the shape by less than 0.1 %. */
const LARGEST_SIDE = 1 / 3;

/** Odd, so that lag 0 sits in the middle of a cell and d and -d fall into cells that are copies. */
export function coarseSide(region: MapRegion, shape: PeakShape): number {
  const needed = Math.ceil(Math.max(region.nx, region.ny) / MOST_CELLS);
  const allowed = Math.floor(LARGEST_SIDE * Math.sqrt(Math.min(shape.xx, shape.yy)));
  return Math.max(
    1,
    Math.min(needed % 2 === 1 ? needed : needed + 1, allowed % 2 === 1 ? allowed : allowed - 1),
  );
}

/** Cells around bin (cx, cy), as many as fit into the region; the rest at its edges is left out. */
export function coarseCells(
  map: FrameMap,
  region: MapRegion,
  side: number,
  centre: { x: number; y: number },
  origin: { x: number; y: number },
): CoarseCells {
  const x = cut(region.x, region.nx, centre.x, side);
  const y = cut(region.y, region.ny, centre.y, side);
  const inner = { x: x.first, y: y.first, nx: x.cells * side, ny: y.cells * side };
  const sum = (at: (bin: number) => number): Float64Array => {
    const out = new Float64Array(x.cells * y.cells);
    for (let v = 0; v < inner.ny; v += 1) {
      const row = Math.floor(v / side) * x.cells;
      for (let u = 0; u < inner.nx; u += 1) {
        const bin = (inner.y + v) * map.nx + inner.x + u;
        if (map.blocked[bin] === 1) continue;
        const cell = row + Math.floor(u / side);
        out[cell] = (out[cell] as number) + at(bin);
      }
    }
    return out;
  };
  const half = (side - 1) / 2;
  return {
    side,
    region: inner,
    grid: {
      nx: x.cells,
      ny: y.cells,
      x0: (inner.x + half - origin.x) / side,
      y0: (inner.y + half - origin.y) / side,
    },
    sum,
    open: sum(() => 1),
  };
}

function cut(first: number, count: number, centre: number, side: number): { first: number; cells: number } {
  const half = (side - 1) / 2;
  const middle = Math.min(Math.max(centre, first + half), first + count - 1 - half);
  const before = Math.floor((middle - half - first) / side);
  const after = Math.floor((first + count - 1 - half - middle) / side);
  return { first: middle - half - before * side, cells: before + 1 + after };
}

/** From bins to cells of `side`, and back. Averaging over a cell adds (side^2 - 1)/12 to the variances. */
export function shapeInCells(shape: PeakShape, side: number): PeakShape {
  const area = side * side;
  const blur = (area - 1) / 12;
  const { mx, my, xx, xy, yy } = shape;
  return { mx: mx / side, my: my / side, xx: (xx + blur) / area, xy: xy / area, yy: (yy + blur) / area };
}

export function shapeInBins(shape: PeakShape, side: number): PeakShape {
  const area = side * side;
  const blur = (area - 1) / 12;
  const { mx, my, xx, xy, yy } = shape;
  return { mx: mx * side, my: my * side, xx: xx * area - blur, xy: xy * area, yy: yy * area - blur };
}
