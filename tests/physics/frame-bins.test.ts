import { expect, it } from 'vitest';
import { fitFramePeaks } from '../../shared/physics/fit-frames';
import { FIT_PARAMETERS } from '../../shared/physics/fit-shape';
import type { FrameMap } from '../../shared/physics/frame-maps';

const width = 128;
const nx = 2 * width - 1;
const centre = width - 1;
const [amplitude, pedestal, variance] = [5000, 2e-4, 1e-4];

/** A difference map that is its own model: a Gaussian of the given variances, thinned by the overlap, on a pedestal. */
function mapOf(xx: number, yy: number, xy: number): FrameMap {
  const cells = nx * nx;
  const pairs = Float64Array.from({ length: cells }, (_, c) => {
    const [dx, dy] = [Math.abs((c % nx) - centre), Math.abs(Math.floor(c / nx) - centre)];
    return (width - dx) * (width - dy);
  });
  const most = width * width;
  const det = xx * yy - xy * xy;
  const value = pairs.map((n, c) => {
    const [u, v] = [(c % nx) - centre, Math.floor(c / nx) - centre];
    const bell = Math.exp(-(yy * u * u - 2 * xy * u * v + xx * v * v) / (2 * det));
    return ((amplitude * bell) / (2 * Math.PI * Math.sqrt(det))) * (n / most) + (pedestal * n) / most;
  });
  const window = { x: 0, y: 0, nx, ny: nx };
  return {
    kind: 'minus',
    nx,
    ny: nx,
    width,
    height: width,
    value,
    pairs,
    fullPairs: pairs,
    light: pairs,
    pedestal: pairs,
    variance: new Float64Array(cells).fill(variance),
    blocked: Uint8Array.from(pairs, (n) => (n < 0.05 * most ? 1 : 0)),
    blocks: 2,
    blockWindow: window,
    blockValue: (block, cell) => (block === 0 ? 0.25 : 0.75) * (value[cell] as number),
  };
}

it('a broad peak fitted in coarse cells has the widths it was made with, in bins', () => {
  const [xx, yy, xy] = [20 ** 2, 26 ** 2, 90];
  const map = mapOf(xx, yy, xy);
  const peak = fitFramePeaks({ minus: map, plus: { ...map, value: new Float64Array(nx * nx) } }, 'minus')
    .minus!;
  // Three bins a cell.
  expect(peak.fit.model.length * 9).toBe(peak.region.nx * peak.region.ny);
  for (const [found, made] of [
    [peak.xx, xx],
    [peak.yy, yy],
    [peak.xy, xy],
    [peak.fit.amplitude, amplitude],
  ] as const) {
    expect(Math.abs(found / made - 1)).toBeLessThan(0.005);
  }
  // The model is there for every bin, and blocks that are shares of one map do not move the shape.
  const c = Math.floor(peak.model.length / 2);
  expect(peak.model[c]! / map.value[centre * nx + centre]!).toBeCloseTo(1, 2);
  for (let b = 0; b < 2; b += 1) {
    expect(Math.abs(peak.influence[b * FIT_PARAMETERS + 3]!)).toBeLessThan(0.01 * xx);
  }
});
