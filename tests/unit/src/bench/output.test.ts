import { describe, expect, it } from 'vitest';
import type { MapData } from '../../../../shared/contracts/output';
import { createRandom } from '../../../../shared/util/random';
import { arrangeMaps } from '../../../../src/components/output/arrange-maps';
import { computeSlice } from '../../../../src/components/output/conditional-slice';
import { cropLine } from '../../../../src/components/output/crop-line';
import { findWindow, plotToRegion, regionToPlot } from '../../../../src/components/output/dial-marks';
import { pairVariants, quantityLabel } from '../../../../src/components/output/quantity-words';
import { delayInfo, histogram } from './fake-engine';

function grid(nx: number, ny: number, data = new Float64Array(nx * ny)): MapData {
  return {
    label: 'map',
    shape: [ny, nx],
    axes: [
      { label: 'x signal', unit: 'um', start: -10, step: 2, arm: 'signal' },
      { label: 'x idler', unit: 'um', start: -20, step: 4, arm: 'idler' },
    ],
    unit: 'pairs',
    scale: 'counts',
    data,
  };
}

describe('the stage', () => {
  it('puts maps in reading order, chooses raw or net, and loses none', () => {
    const maps: Record<string, MapData> = {
      'singles.signal': grid(2, 2),
      mystery: grid(2, 2),
      'image.raw': grid(2, 2),
      'image.net': grid(2, 2),
      'delay.histogram': histogram(),
      'rates.signal': histogram(),
    };
    const ids = (variant: 'raw' | 'net') =>
      arrangeMaps('ghost-image', maps, variant).map(({ cells }) => cells.map(({ id }) => id));
    expect(ids('net')).toEqual([
      ['image.net'],
      ['delay.histogram'],
      ['singles.signal'],
      ['mystery'],
      ['rates.signal'],
    ]);
    expect(ids('raw')[0]).toEqual(['image.raw']);
    expect(arrangeMaps('unheard-of', maps, 'net').flatMap(({ cells }) => cells)).toHaveLength(5);
  });

  it('knows raw and net also where the acquisition is named last', () => {
    const maps = { 'joint.x.near': grid(2, 2), 'joint.x.raw.near': grid(2, 2), 'joint.x.far': grid(2, 2) };
    const ids = (variant: 'raw' | 'net') =>
      arrangeMaps('witness', maps, variant).flatMap(({ cells }) => cells.map(({ id }) => id));
    expect(ids('net')).toEqual(['joint.x.near', 'joint.x.far']);
    expect(ids('raw')).toEqual(['joint.x.raw.near', 'joint.x.far']);
  });

  it('shows near beside far in a witness, position difference beside momentum sum', () => {
    const maps = Object.fromEntries(
      ['joint.x.near', 'joint.x.far', 'joint.y.near', 'joint.y.far'].map((id) => [id, grid(2, 2)]),
    );
    maps['minus.x.near'] = histogram();
    maps['plus.x.far'] = histogram();
    maps['plus.x.near'] = histogram();
    const sections = arrangeMaps('witness', maps, 'net').map(({ cells }) => cells.map(({ id }) => id));
    expect(sections).toEqual([
      ['joint.x.near', 'joint.x.far'],
      ['minus.x.near', 'plus.x.far'],
      ['joint.y.near', 'joint.y.far'],
      ['plus.x.near'],
    ]);
  });
});

describe('the ledger', () => {
  it('says ids in words and pairs raw with net', () => {
    expect(quantityLabel('reid.x.net')).toBe('Reid product, x');
    expect(quantityLabel('width.x.minus.fit')).toBe('Difference width, x, fit');
    expect(quantityLabel('accidentals.shifted')).toBe('Accidentals, shifted windows');
    expect(quantityLabel('dark-counts.odd')).toBe('Dark counts odd');
    const rows = pairVariants({ 'reid.x.raw': 1, 'reid.x.net': 2, car: 3 });
    expect(rows).toMatchObject([
      { base: 'reid.x', raw: 1, net: 2, only: null },
      { base: 'car', only: 3 },
    ]);
  });
});

describe('the conditional slice', () => {
  it('is the column or row through the bin, normalised, in the other arm’s coordinate', () => {
    const map = grid(3, 4, Float64Array.from([1, 9, 0, 0, 30, 0, 0, 60, 0, 0, 1, 900]));
    const slice = computeSlice(map, 'x', 1, 2);
    expect(slice).toMatchObject({ total: 100, totalSigma: 10, carries: true });
    expect([...slice.map.data]).toEqual([0.09, 0.3, 0.6, 0.01]);
    expect(slice.map.axes[0]?.label).toBe('x idler');
    expect(slice.given.at).toBe(-8);
    expect(slice.mean?.value).toBeCloseTo(-20 + 4 * (0.3 + 1.2 + 0.03), 12);
    expect(computeSlice(map, 'y', 0, 3).given.axis.label).toBe('x idler');
    expect(computeSlice(map, 'x', 0, 0)).toMatchObject({ carries: false, mean: null });
    // A covariance map without errors: the shape may be shown, no moment may.
    const bare = computeSlice({ ...map, unit: 'counts^2', scale: 'signed' }, 'x', 1, 2);
    expect(bare).toMatchObject({ carries: true, totalSigma: null, mean: null, width: null });
    expect(bare.map.sigma).toBeUndefined();
  });

  it('finds the truth, with errors that cover it: 200 seeded slices of 400 pairs', () => {
    const [truthMean, truthWidth] = [1.5, 9];
    let [inMean, inWidth, sumMean, sumWidth] = [0, 0, 0, 0];
    const runs = 200;
    for (let seed = 1; seed <= runs; seed++) {
      const random = createRandom(seed);
      const map = grid(1, 41);
      map.axes[1] = { label: 'x idler', unit: 'um', start: -40, step: 2 };
      for (let pair = 0; pair < 400; pair++) {
        const bin = Math.round((truthMean + truthWidth * random.normal() + 40) / 2);
        if (bin >= 0 && bin < 41) map.data[bin]!++;
      }
      const { mean, width } = computeSlice(map, 'x', 0, 0);
      // Bins of 2 add step^2/12 to the variance (Sheppard).
      const expected = Math.sqrt(truthWidth ** 2 + 4 / 12);
      if (Math.abs(mean!.value - truthMean) < mean!.sigma) inMean++;
      if (Math.abs(width!.value - expected) < width!.sigma) inWidth++;
      sumMean += (mean!.value - truthMean) / mean!.sigma;
      sumWidth += (width!.value - expected) / width!.sigma;
    }
    for (const share of [inMean / runs, inWidth / runs]) {
      expect(share).toBeGreaterThan(0.55);
      expect(share).toBeLessThan(0.8);
    }
    // The mean pull of 200 runs has a standard error of 0.07; V is biased by -1/n, which is 0.04 of a pull here.
    expect(Math.abs(sumMean / runs)).toBeLessThan(0.21);
    expect(Math.abs(sumWidth / runs)).toBeLessThan(0.25);
  });
});

describe('dials on plots', () => {
  it('turn a window in ns on the histogram into dials in ps, and back', () => {
    const axis = histogram().axes[0]!;
    const mark = findWindow(axis, '', delayInfo.dials, { window: null, delay: 500 }, { window: 1000 });
    expect(mark).toMatchObject({ lo: 0, hi: 1 });
    expect(mark?.turn?.(0.2, 0.82)).toEqual({ delay: 510, window: 620 });
    expect(findWindow(axis, '', [], {}, { window: 1000, delay: 0 })?.turn).toBeNull();
    expect(findWindow(axis, '', delayInfo.dials, {}, {})).toBeNull();
  });

  it('turn rectangles into whole pixels, whichever way the axis runs', () => {
    const map = grid(8, 6);
    const region = { x0: 1, y0: 2, x1: 4, y1: 5 };
    expect(regionToPlot(region, map)).toEqual({ x0: -9, x1: -1, y0: -14, y1: 2 });
    expect(plotToRegion(regionToPlot(region, map), map)).toEqual(region);
    const turned = { ...map, axes: [{ ...map.axes[0]!, start: 10, step: -2 }, map.axes[1]!] };
    expect(plotToRegion(regionToPlot(region, turned), turned)).toEqual(region);
  });

  it('crop the histogram to whole bins about the window', () => {
    const map = histogram();
    const cropped = cropLine(map, [-2, 2]);
    expect(cropped.shape[0]).toBe(cropped.data.length);
    expect(cropped.axes[0]!.start).toBeCloseTo(-2, 9);
    expect(cropped.data[20]).toBe(map.data[200]);
    expect(cropLine(map, [500, 600])).toBe(map);
    expect(cropLine(map, [-1e9, 1e9])).toBe(map);
  });
});
