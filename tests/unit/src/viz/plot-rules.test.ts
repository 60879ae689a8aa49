import { describe, expect, it } from 'vitest';
import { axisSpan, binAt, shiftInside, zoomSpan } from '../../../../src/viz/axis-geometry';
import { moveWindow } from '../../../../src/viz/BrushHandles';
import { buildColourScale, colourTicks, paletteIndex } from '../../../../src/viz/colour-scale';
import { ellipsePoints } from '../../../../src/viz/ellipse';
import { decades, formatPosition, tickFormatter } from '../../../../src/viz/format-tick';
import { buildBlankPath } from '../../../../src/viz/hatch';
import { labelRows } from '../../../../src/viz/LineMarks';
import { computeResiduals, dotPath, stepPath, valueSpan } from '../../../../src/viz/line-paths';
import { computeBinTransform, computeMapRect, fullView, pixelToPoint } from '../../../../src/viz/map-layout';
import { moveBin, regionBetween } from '../../../../src/viz/map-region';
import { computeExtremes, describeMap, describePoint } from '../../../../src/viz/map-values';
import { getPalette } from '../../../../src/viz/palettes';
import { stripPath } from '../../../../src/viz/RateStrip';
import { paintPixels } from '../../../../src/viz/raster';
import { buildRulerAxis, fitRulerAxis, placeRulerLabel } from '../../../../src/viz/ruler-layout';
import { smallHistogram, smallMap } from './maps';

describe('axes', () => {
  const axis = { label: 'x', unit: 'um', start: -15, step: 10 };

  it('reach half a bin beyond the centres, whichever way they run', () => {
    expect(axisSpan(axis, 4)).toEqual([-20, 20]);
    expect(axisSpan({ ...axis, start: 15, step: -10 }, 4)).toEqual([-20, 20]);
  });

  it('find the bin of a position', () => {
    expect(binAt(axis, 4, -19.9)).toBe(0);
    expect(binAt(axis, 4, 6)).toBe(2);
    expect(binAt(axis, 4, 21)).toBeNull();
  });

  it('zoom about a point that stays where it is, and stop at the edges', () => {
    const [lo, hi] = zoomSpan([0, 100], 25, 0.5, [0, 100], 1);
    expect((25 - lo) / (hi - lo)).toBeCloseTo(0.25);
    expect(zoomSpan([lo, hi], 25, 10, [0, 100], 1)).toEqual([0, 100]);
    expect(shiftInside([10, 20], -50, [0, 100])).toEqual([0, 10]);
  });

  it('label ticks alike and positions to their bin', () => {
    expect([0, 0.25, 0.5].map(tickFormatter([0, 0.25, 0.5]))).toEqual(['0.00', '0.25', '0.50']);
    expect(tickFormatter([-20000, 0, 20000])(-20000)).toBe('\u221220\u2009000');
    expect(formatPosition(-24.96, 10)).toBe('\u221225');
    expect(formatPosition(0.12345, 0.01)).toBe('0.12');
    expect(decades(0.02, 30)).toEqual([0.1, 1, 10]);
  });
});

describe('map values', () => {
  it('leave masked bins out of the extremes', () => {
    const map = smallMap();
    map.data[5] = 1e9;
    expect(computeExtremes(map)).toEqual({ min: 0, max: 100, minPositive: 1, maxIndex: 8, blank: 1 });
  });

  it('say position with units, value and sigma', () => {
    expect(describePoint(smallMap(), { x: -15, y: 10 })).toBe(
      'x signal \u221215 µm · x idler 10 µm · 100(10) pairs',
    );
    expect(describePoint(smallMap(), { x: -5, y: 0 })).toContain('masked');
    expect(describePoint(smallMap(), { x: 99, y: 0 })).toBeNull();
  });

  it('tell the map in words, also when it is empty', () => {
    expect(describeMap(smallMap(), computeExtremes(smallMap()))).toMatch(
      /4 by 3 bins.*Largest.*100\(10\) pairs.*1 bins masked/,
    );
    const empty = smallMap({ data: new Float64Array(12).fill(Number.NaN), masked: undefined });
    expect(describeMap(empty, computeExtremes(empty))).toContain('No values yet');
  });
});

describe('colour scale', () => {
  const of = (map: ReturnType<typeof smallMap>) => computeExtremes(map);

  it('starts counts at zero and centres signed maps on it', () => {
    const counts = buildColourScale('counts', of(smallMap()), undefined, false);
    expect([counts.lo, counts.hi, counts.clipsLow, counts.clipsHigh]).toEqual([0, 100, false, false]);
    const map = smallMap({ data: Float64Array.from([-3, 1, 0, 2, 0, 0, 0, 0, 0, 0, 0, 0]), scale: 'signed' });
    const signed = buildColourScale('signed', of(map), undefined, true);
    expect([signed.lo, signed.hi, signed.log]).toEqual([-3, 3, false]);
    expect(colourTicks(signed, 5).find((tick) => tick.share === 0.5)?.label).toMatch(/^0/);
  });

  it('says when values are clipped', () => {
    const scale = buildColourScale('counts', of(smallMap()), [2, 50], false);
    expect([scale.clipsLow, scale.clipsHigh]).toEqual([true, true]);
    expect(paletteIndex(scale, 100)).toBe(255);
    expect(paletteIndex(scale, 0)).toBe(0);
  });

  it('keeps one count apart from none on a logarithmic scale', () => {
    const scale = buildColourScale('counts', of(smallMap()), undefined, true);
    expect(scale.log).toBe(true);
    expect(paletteIndex(scale, 0)).toBe(0);
    expect(paletteIndex(scale, 1)).toBeGreaterThan(20);
  });

  it('survives maps that are empty, flat or infinite', () => {
    for (const fill of [Number.NaN, 0, -2, 7, Number.POSITIVE_INFINITY]) {
      const map = smallMap({ data: new Float64Array(12).fill(fill), masked: undefined });
      for (const kind of ['counts', 'signed'] as const) {
        const scale = buildColourScale(kind, of(map), undefined, true);
        expect(scale.hi).toBeGreaterThan(scale.lo);
        expect(colourTicks(scale, 4).every((tick) => Number.isFinite(tick.share))).toBe(true);
      }
    }
  });

  it('paints pixels as the rectangles are coloured, masked ones clear', () => {
    const map = smallMap();
    const palette = getPalette('bench', 'counts');
    for (const log of [false, true]) {
      const scale = buildColourScale('counts', of(map), undefined, log);
      const out = new Uint32Array(12);
      for (const _ of paintPixels(map, scale, palette, out));
      map.data.forEach((value, i) => {
        expect(out[i]).toBe(i === 5 ? 0 : palette.pixels[paletteIndex(scale, value)]);
      });
    }
  });
});

describe('map geometry', () => {
  const map = smallMap();
  const full = fullView(map);
  const rect = computeMapRect(map, full, { width: 500, height: 400, em: 11 });

  it('keeps equal aspect for equal units', () => {
    expect(rect.width / rect.height).toBeCloseTo(40 / 30, 1);
  });

  it('puts bins where their positions are, the first row lowest', () => {
    const t = computeBinTransform(map, full, rect);
    const centre = pixelToPoint(full, rect, t.tx + t.sx * 0.5, t.ty + t.sy * 0.5);
    expect(centre.x).toBeCloseTo(-15);
    expect(centre.y).toBeCloseTo(-10);
    expect(t.sy).toBeLessThan(0);
  });

  it('hatches each run of blank bins once', () => {
    const masked = new Uint8Array(12);
    masked.set([1, 1], 1);
    masked.set([1], 8);
    const path = buildBlankPath(smallMap({ masked }), { sx: 10, sy: -10, tx: 0, ty: 30 });
    expect(path).toBe('M10 30h20v-10H10ZM0 10h10v-10H0Z');
  });

  it('draws regions of whole bins and moves by bins', () => {
    expect(regionBetween(map, { ix: 2, iy: 1 }, { ix: 1, iy: 0 })).toEqual({
      x0: -10,
      y0: -15,
      x1: 10,
      y1: 5,
    });
    expect(moveBin(map, null, 1, 0)).toEqual({ ix: 2, iy: 1 });
    expect(moveBin(map, { x: 15, y: 10 }, 1, 1)).toEqual({ ix: 3, iy: 2 });
    // On an axis that runs backwards, right still means rising positions.
    const back = smallMap({ axes: [{ ...map.axes[0]!, start: 15, step: -10 }, map.axes[1]!] });
    expect(moveBin(back, { x: 5, y: 0 }, 1, 0)).toEqual({ ix: 0, iy: 1 });
  });

  it('puts every point of the ellipse at its Mahalanobis distance', () => {
    const ellipse = { x: 1, y: -2, xx: 9, xy: -4, yy: 4 };
    const det = 9 * 4 - 16;
    for (const { x, y } of ellipsePoints(ellipse, 2)) {
      const [dx, dy] = [x - 1, y + 2];
      expect((4 * dx * dx + 8 * dx * dy + 9 * dy * dy) / det).toBeCloseTo(4, 9);
    }
    expect(ellipsePoints({ ...ellipse, xy: 7 }, 2)).toEqual([]);
  });
});

describe('line plots', () => {
  const scales = { x: (at: number) => at, y: (value: number) => -value };

  it('start counts at zero and make room for error bars', () => {
    const [lo, hi] = valueSpan(smallHistogram(), { from: 0, to: 21 }, false);
    expect(lo).toBe(0);
    expect(hi).toBeGreaterThan(110);
    const [least] = valueSpan(smallHistogram(), { from: 0, to: 21 }, true);
    expect(least).toBeGreaterThan(0);
  });

  it('leave a gap where there is no value', () => {
    const map = smallHistogram({ masked: Uint8Array.from({ length: 21 }, (_, i) => Number(i === 4)) });
    expect(stepPath(map, { from: 0, to: 21 }, scales).split('M')).toHaveLength(3);
    expect(dotPath(map, { from: 0, to: 21 }, map.data, scales).split('M')).toHaveLength(21);
  });

  it('divide residuals by sigma', () => {
    const residuals = computeResiduals(smallHistogram());
    expect(residuals?.[10]).toBeCloseTo(1 / 10);
    expect(computeResiduals(smallHistogram({ model: undefined }))).toBeNull();
  });

  it('keep a brushed window on the axis and its edges apart', () => {
    expect(moveWindow([-2, 2], 'both', 100, [-10, 10], 1)).toEqual([6, 10]);
    expect(moveWindow([-2, 2], 'lo', 100, [-10, 10], 1)).toEqual([1, 2]);
    expect(moveWindow([-2, 2], 'hi', -100, [-10, 10], 1)).toEqual([-2, -1]);
  });

  it('stack labels that would touch', () => {
    const labels = [0, 5, 20].map((x) => ({ x, width: 10 }));
    expect(labelRows(labels)).toEqual([0, 1, 0]);
  });

  it('draws a rate from zero and breaks where it is unknown', () => {
    expect(stripPath([0, 2, 4])).toBe('M0.0000 1.0000L0.5000 0.5000L1.0000 0.0000');
    expect(stripPath([1, Number.NaN, 1]).split('M')).toHaveLength(3);
    expect(stripPath([])).toBe('');
  });
});

describe('bound ruler', () => {
  it('keeps a label off the bounds and inside the plot', () => {
    const mark = { from: 100, to: 120 };
    expect(placeRulerLabel(mark, 60, [300, 400])).toEqual({ x: 120, anchor: 'start' });
    expect(placeRulerLabel(mark, 60, [150, 400])).toEqual({ x: 100, anchor: 'end' });
    // No side is free: the right, over a halo.
    expect(placeRulerLabel(mark, 110, [150, 400])).toEqual({ x: 120, anchor: 'start' });
  });

  const entry = {
    label: 'raw' as const,
    value: 0.03,
    sigma: 0.001,
    interval: [0.028, 0.032] as const,
    unit: 'hbar^2',
  };
  const bounds = [{ name: 'steering', value: 0.25, unit: 'hbar^2' }];

  it('spans whole decades around value and bounds', () => {
    const axis = buildRulerAxis({ entries: [entry], bounds }, 0, 100);
    expect([axis.log, ...axis.domain, axis.ticks]).toEqual([true, 0.01, 1, [0.01, 0.1, 1]]);
  });

  it('turns linear where a logarithm has no place', () => {
    const axis = buildRulerAxis(
      { entries: [{ ...entry, value: -1, interval: [-1.2, -0.8] }], bounds },
      0,
      100,
    );
    expect(axis.log).toBe(false);
    expect(axis.x(-1)).toBeLessThan(axis.x(0.25));
  });

  it('shortens the axis for the label of the last bound', () => {
    const wide = [{ name: 'a bound with a long name', value: 0.9, unit: '1' }];
    const axis = fitRulerAxis(
      { entries: [entry], bounds: wide },
      { left: 10, width: 600, right: 10 },
      wide,
      [180],
    );
    expect(axis.x(0.9) + 180).toBeLessThanOrEqual(600);
  });
});
