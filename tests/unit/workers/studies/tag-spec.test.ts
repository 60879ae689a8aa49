import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createTagAccumulator } from '../../../../workers/accumulators/tag-accumulator';
import { blindChoice, choosePeak, histogramPs } from '../../../../workers/studies/peak-search';
import {
  bucketArm,
  buildArm,
  buildTagSpec,
  detectorArm,
  effectiveWidthPs,
  histogramAround,
} from '../../../../workers/studies/tag-spec';
import { arrayMap } from '../../../support/run-study';
import { tagBlock } from '../accumulators/tag-twin';

const request = {
  a: bucketArm(0, 0, 1000),
  b: bucketArm(1, 0, 1000),
  tickFs: 1000,
  delayPs: 0,
  windowPs: 1000,
  shiftStepPs: 20000,
  shiftCount: 10,
  histogramRangePs: 200000,
  histogramBinPs: 100,
};

describe('arms', () => {
  it('numbers rows, columns and flips', () => {
    const pixels = (order: 'rows' | 'columns', flipX = false, flipY = false) => [
      ...buildArm({ ...arrayMap(3, 2, 10), order, flipX, flipY }, 1000).pixelOfChannel.slice(10, 16),
    ];
    expect(pixels('rows')).toEqual([0, 1, 2, 3, 4, 5]);
    expect(pixels('columns')).toEqual([0, 3, 1, 4, 2, 5]);
    expect(pixels('rows', true)).toEqual([2, 1, 0, 5, 4, 3]);
    expect(pixels('rows', false, true)).toEqual([3, 4, 5, 0, 1, 2]);
  });

  it('is a bijection of channels and pixels, whatever the map', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 9 }),
        fc.integer({ min: 1, max: 9 }),
        fc.boolean(),
        fc.boolean(),
        fc.constantFrom('rows' as const, 'columns' as const),
        (width, height, flipX, flipY, order) => {
          const arm = buildArm({ ...arrayMap(width, height, 7), flipX, flipY, order }, 1000);
          const seen = [...arm.pixelOfChannel].filter((pixel) => pixel >= 0).sort((p, q) => p - q);
          expect(seen).toEqual(Array.from({ length: width * height }, (_, pixel) => pixel));
        },
      ),
      { numRuns: 60 },
    );
  });

  it('masks pixels and rounds delays to whole ticks, each pixel with its own', () => {
    const map = {
      ...arrayMap(2, 1, 4),
      flipX: true,
      maskedPixels: [1],
      delayPs: 100,
      pixelDelayPs: [30, -30],
    };
    const arm = buildArm(map, 50_000);
    expect([...arm.pixelOfChannel.slice(4, 6)]).toEqual([-1, 0]);
    expect([...arm.delayTickOfChannel.slice(4, 6)]).toEqual([1, 3]);
    expect([...arm.masked]).toEqual([0, 1]);
  });

  it('refuses maps that do not fit', () => {
    expect(() => buildArm({ ...arrayMap(2, 2, 0), pixelDelayPs: [1] }, 1000)).toThrow(
      /4 pixels but 1 pixel delays/,
    );
    expect(() => buildArm({ ...arrayMap(2, 2, 0), delayPs: 1e13 }, 1000)).toThrow(/2\^31 ticks/);
    expect(() => detectorArm({ version: 1, kind: 'tags' }, 'idler', 1000)).toThrow(/no idler arm/);
    expect(() => buildTagSpec({ ...request, b: request.a })).toThrow(/Channel 0 is in both arms/);
  });
});

describe('windows', () => {
  it('come to the nearest whole ticks, centred within half a tick', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -1e6, max: 1e6, noNaN: true }),
        fc.double({ min: 1, max: 9000, noNaN: true }),
        fc.constantFrom(1000, 25_000, 156_250),
        (delayPs, windowPs, tickFs) => {
          const spec = buildTagSpec({ ...request, tickFs, delayPs, windowPs, shiftStepPs: 1e6 });
          const tickPs = tickFs / 1000;
          const { loTick, hiTick } = spec.window!;
          const width = effectiveWidthPs({ window: spec.window!, tickFs });
          expect(Math.abs(width - windowPs)).toBeLessThanOrEqual(
            Math.max(tickPs / 2, tickPs - windowPs) + 1e-6,
          );
          expect(Math.abs(((loTick + hiTick) / 2) * tickPs - delayPs)).toBeLessThanOrEqual(tickPs / 2 + 1e-6);
        },
      ),
    );
  });

  it('are shifted half to each side and clear of the peak', () => {
    expect(buildTagSpec({ ...request, shiftCount: 3 }).window?.shiftsTick).toEqual([20000, -20000, 40000]);
    expect(() => buildTagSpec({ ...request, shiftStepPs: 1999 })).toThrow(/at least twice .* 2000 ps here/);
    expect(() => buildTagSpec({ ...request, shiftStepPs: 2000 })).not.toThrow();
  });

  it('lie in a histogram that is symmetric about the delay', () => {
    for (const [centre, range, bin] of [
      [0, 1000, 10],
      [137, 999, 7],
      [-50, 3, 10],
    ] as const) {
      const { loTick, binTick, bins } = histogramAround(centre, range, bin, 1000);
      expect(Math.abs(loTick + (bins * binTick - 1) / 2 - centre)).toBeLessThanOrEqual(0.5);
      expect(bins * binTick).toBeGreaterThanOrEqual(Math.min(2 * range, bin));
    }
  });
});

describe('counting with them', () => {
  const t1 = [0, 10, 20, 30];
  const t2 = [1, 12, 29, 33];
  const block = tagBlock(
    [
      ...t1.map((t) => ({ tick: BigInt(t), channel: 0 })),
      ...t2.map((t) => ({ tick: BigInt(t), channel: 1 })),
    ],
    0n,
  );

  it('gives the histogram edges half a tick before the first whole one', () => {
    const accumulator = createTagAccumulator({
      kind: 'tags',
      tickFs: 1000,
      a: request.a,
      b: request.b,
      histogram: { loTick: -15, binTick: 5, bins: 6 },
      window: null,
    });
    accumulator.push(block);
    const tally = accumulator.tally();
    expect(histogramPs(tally)).toMatchObject({ lo: -15.5, step: 5 });
    expect(choosePeak(tally, { delay: null, window: null, 'histogram.bin': null })).toBeNull();
  });

  it('falls back on a plain window where nothing stands out', () => {
    const dials = { delay: null, window: null, 'histogram.bin': null };
    expect(blindChoice(dials)).toMatchObject({ delay: 0, window: 2000 });
    expect(blindChoice({ ...dials, delay: 40, window: 500 })).toMatchObject({ delay: 40, window: 500 });
  });
});
