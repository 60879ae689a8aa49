/**
 * A normalised two-dimensional Gaussian averaged over the cells of a unit grid, with its derivatives. The average is a
 * product quadrature, so that value and derivatives are consistent to the last bit and need no error function.
 */
export interface PeakShape {
  mx: number;
  my: number;
  xx: number;
  xy: number;
  yy: number;
}
export const SHAPE_PARAMETERS = 5;

export interface CellGrid {
  nx: number;
  ny: number;
  /** Coordinates of the first cell's centre; the step is 1. */
  x0: number;
  y0: number;
}

/** One-dimensional averaging rule; used as a product in x and y. */
export interface CellNodes {
  offset: readonly number[];
  weight: readonly number[];
}

/**
 * Gauss-Legendre over one pixel (joint maps of pixel counts). Four nodes hold 1e-5 of the peak for widths of half a
 * pixel; two do so from one and a half pixels up, eight down to a quarter.
 */
export const pixelNodes: Record<2 | 4 | 8, CellNodes> = {
  2: halved([1 / Math.sqrt(3)], [1]),
  4: halved([0.3399810435848563, 0.8611363115940526], [0.6521451548625461, 0.3478548451374538]),
  8: halved(
    [0.1834346424956498, 0.525532409916329, 0.7966664774136267, 0.9602898564975363],
    [0.362683783378362, 0.3137066458778873, 0.2223810344533745, 0.1012285362903763],
  ),
};

/**
 * Difference or sum of two pixel coordinates: the triangle law on (-1, 1), by three nodes that have its moments up to
 * the fifth (variance 1/6, fourth moment 1/15).
 */
export const triangleNodes: CellNodes = {
  offset: [-Math.sqrt(0.4), 0, Math.sqrt(0.4)],
  weight: [5 / 24, 7 / 12, 5 / 24],
};

/** The centre alone, for peaks several cells wide: the shape then is that of the averaged peak itself. */
export const centreNode: CellNodes = { offset: [0], weight: [1] };

function halved(nodes: readonly number[], weights: readonly number[]): CellNodes {
  return {
    offset: [...nodes.map((v) => -v / 2), ...nodes.map((v) => v / 2)],
    weight: [...weights.map((v) => v / 2), ...weights.map((v) => v / 2)],
  };
}

/** Room for one evaluation; derivative rows in the order mx, my, xx, xy, yy: d[p * cells + cell]. */
export interface CellValues {
  value: Float64Array;
  derivative: Float64Array;
}

export function createCellValues(grid: CellGrid): CellValues {
  const cells = grid.nx * grid.ny;
  return { value: new Float64Array(cells), derivative: new Float64Array(SHAPE_PARAMETERS * cells) };
}

/** exp(-36) = 2e-16 of the peak: nothing further out changes a double. */
const FAR = 72;

/** O(cells * nodes^2). The determinant must be positive. */
export function evaluateCells(shape: PeakShape, grid: CellGrid, nodes: CellNodes, out: CellValues): void {
  const { mx, my, xx, xy, yy } = shape;
  const det = xx * yy - xy * xy;
  const pxx = yy / det;
  const pxy = -xy / det;
  const pyy = xx / det;
  const norm = 1 / (2 * Math.PI * Math.sqrt(det));
  const { value, derivative } = out;
  const cells = grid.nx * grid.ny;
  const count = nodes.offset.length;
  // Nodes lie within the cell, so a cell this far out has none inside FAR.
  const narrow = (xx + yy) / 2 - Math.hypot((xx - yy) / 2, xy);
  const reach = nodes.offset.reduce((far, v) => Math.max(far, Math.abs(v)), 0) * Math.SQRT2;
  const skip = (Math.sqrt(FAR) + reach / Math.sqrt(narrow)) ** 2;
  for (let iy = 0; iy < grid.ny; iy += 1) {
    for (let ix = 0; ix < grid.nx; ix += 1) {
      const cell = iy * grid.nx + ix;
      let g = 0;
      let gx = 0;
      let gy = 0;
      let gxx = 0;
      let gxy = 0;
      let gyy = 0;
      const cx = grid.x0 + ix - mx;
      const cy = grid.y0 + iy - my;
      const near = pxx * cx * cx + 2 * pxy * cx * cy + pyy * cy * cy < skip;
      for (let b = 0; near && b < count; b += 1) {
        const ry = grid.y0 + iy + (nodes.offset[b] as number) - my;
        const wb = nodes.weight[b] as number;
        for (let a = 0; a < count; a += 1) {
          const rx = grid.x0 + ix + (nodes.offset[a] as number) - mx;
          const tx = pxx * rx + pxy * ry;
          const ty = pxy * rx + pyy * ry;
          const q = rx * tx + ry * ty;
          if (!(q < FAR)) continue;
          const v = wb * (nodes.weight[a] as number) * norm * Math.exp(-q / 2);
          g += v;
          gx += v * tx;
          gy += v * ty;
          gxx += (v * (tx * tx - pxx)) / 2;
          gxy += v * (tx * ty - pxy);
          gyy += (v * (ty * ty - pyy)) / 2;
        }
      }
      value[cell] = g;
      derivative[cell] = gx;
      derivative[cells + cell] = gy;
      derivative[2 * cells + cell] = gxx;
      derivative[3 * cells + cell] = gxy;
      derivative[4 * cells + cell] = gyy;
    }
  }
}
