import { describe, expect, it } from 'vitest';
import { fitShape } from '../../shared/physics/fit-shape';
import { pixelNodes } from '../../shared/physics/gaussian-cells';

describe('Errors of a fitted peak from its Fisher matrix', () => {
  it('C15: 2000 pairs in a round peak on 200 per unit area', () => {
    // Derived by numerics (radial integral and 2-D grid of the exact Fisher information), to 2e-4.
    // Cells of a tenth of sigma stand for the continuous law.
    const sigma = 10;
    const n = 121;
    const middle = (n - 1) / 2;
    const data = Float64Array.from({ length: n * n }, (_, c) => {
      const square = ((c % n) - middle) ** 2 + (Math.floor(c / n) - middle) ** 2;
      return (2000 * Math.exp(-square / (2 * sigma * sigma))) / (2 * Math.PI * sigma * sigma) + 2;
    });
    const { free, covariance } = fitShape({
      grid: { nx: n, ny: n, x0: 0, y0: 0 },
      nodes: pixelNodes[2],
      data,
      use: new Uint8Array(n * n).fill(1),
      envelope: null,
      background: new Float64Array(n * n).fill(1),
      backgroundAmplitude: 200 / sigma ** 2,
      freeAmplitude: true,
      freeBackground: false,
      freeCentre: true,
      variance: null,
      start: { amplitude: 2000, shape: { mx: middle, my: middle, xx: 100, xy: 0, yy: 100 } },
      leastVariance: 0.02,
    });
    const [xx, yy] = [free.indexOf(3), free.indexOf(5)];
    const at = (a: number, b: number) => covariance[a * free.length + b]!;
    // sigma^2 = (xx + yy)/2 of a round peak, and d sigma / sigma = d sigma^2 / (2 sigma^2).
    const ofSquare = Math.sqrt(at(xx, xx) + at(yy, yy) + 2 * at(xx, yy)) / 2;
    expect(Math.abs(ofSquare / (2 * sigma ** 2) - 0.030652925234862387)).toBeLessThan(2e-4);
  });
});
