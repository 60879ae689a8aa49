import { describe, expect, it } from 'vitest';
import { createRandom } from '../../../../shared/util/random';
import { FrameSpectra, paddedLength } from '../../../../workers/kernels/frame-spectra';

/** plus and minus of two images as double loops over pixels. */
function slowMaps(x: Float64Array, y: Float64Array, width: number, height: number) {
  const wide = 2 * width - 1;
  const plus = new Float64Array(wide * (2 * height - 1));
  const minus = new Float64Array(plus.length);
  for (let i = 0; i < x.length; i++) {
    for (let j = 0; j < y.length; j++) {
      const [xi, yi, xj, yj] = [i % width, Math.floor(i / width), j % width, Math.floor(j / width)];
      plus[(yi + yj) * wide + xi + xj]! += x[i]! * y[j]!;
      minus[(yj - yi + height - 1) * wide + xj - xi + width - 1]! += (x[i]! * y[j]! + y[i]! * x[j]!) / 2;
    }
  }
  return { plus, minus };
}

const largest = (map: Float64Array) => map.reduce((most, v) => Math.max(most, Math.abs(v)), 0);

describe('frame spectra', () => {
  it('pads to the power of two that holds all lags', () => {
    // Check B16: 256 -> 512.
    expect([1, 2, 3, 64, 128, 129, 256].map(paddedLength)).toEqual([2, 4, 8, 128, 256, 512, 512]);
  });

  it('sums two images at once, one alone and a product as the double loops do', () => {
    const random = createRandom(11);
    for (const [width, height] of [
      [1, 1],
      [3, 1],
      [1, 9],
      [7, 12],
      [16, 5],
    ] as const) {
      const images = Array.from({ length: 4 }, () =>
        Float64Array.from({ length: width * height }, () => random.below(9) - 4),
      );
      const [p, q, r, s] = images as [Float64Array, Float64Array, Float64Array, Float64Array];
      const spectra = new FrameSpectra(width, height);
      const plus = new Float64Array((2 * width - 1) * (2 * height - 1));
      const minus = new Float64Array(plus.length);
      spectra.addSquares(p, q);
      spectra.addSquares(r, null);
      spectra.addProduct(p, s);
      spectra.moveTo(plus, minus, 0.5);
      const terms = [slowMaps(p, p, width, height), slowMaps(q, q, width, height)];
      terms.push(slowMaps(r, r, width, height), slowMaps(p, s, width, height));
      for (const [got, key] of [
        [plus, 'plus'],
        [minus, 'minus'],
      ] as const) {
        const wanted = got.map((_, i) => terms.reduce((sum, term) => sum + term[key][i]! / 2, 0));
        const off = wanted.map((value, i) => value - got[i]!);
        expect(largest(off), `${key} ${width} x ${height}`).toBeLessThanOrEqual(1e-12 * largest(wanted));
      }
      const again = new Float64Array(plus.length);
      spectra.moveTo(again, again, 1);
      expect(largest(again)).toBe(0);
    }
  });
});
