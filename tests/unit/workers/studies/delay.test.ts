import { describe, expect, it } from 'vitest';
import type { TagBlock } from '../../../../shared/contracts/blocks';
import type { TagDetector } from '../../../../shared/contracts/detector';
import type { StudyOutput } from '../../../../shared/contracts/output';
import { createRandom, type Random } from '../../../../shared/util/random';
import { createTagAccumulator } from '../../../../workers/accumulators/tag-accumulator';
import { delayStudy } from '../../../../workers/studies/delay/study';
import { fillDials } from '../../../../workers/studies/dials';
import { type PairStream, pairStream } from '../../../support/pair-stream';
import { arrayMap, runTagStudy, tagInput } from '../../../support/run-study';

const detector: TagDetector = {
  version: 1,
  kind: 'tags',
  signal: arrayMap(4, 4, 0),
  idler: arrayMap(4, 4, 100),
};
const stream: PairStream = {
  seconds: 0.2,
  tickFs: 1000,
  pairRate: 2e5,
  jitterPs: [150, 150],
  delayPs: 3210,
  darks: [2e4, 3e4],
  land: (r: Random) => [r.uniform() < 0.2 ? r.below(16) : -1, r.uniform() < 0.25 ? 100 + r.below(16) : -1],
  darkChannel: (arm, r) => arm * 100 + r.below(16),
};
const block = pairStream(stream, 4);
const statusOf = (output: StudyOutput, id: string): string | undefined =>
  output.checks.find((check) => check.id === id)?.status;

describe('Delay', () => {
  const run = runTagStudy(delayStudy, block, detector);

  it('answers with the quantities, maps and choices it promises', () => {
    const { quantities, maps, chosen, statement } = run.output;
    expect(Object.keys(quantities).sort()).toEqual(
      [
        'singles.signal',
        'singles.idler',
        'delay.peak',
        'delay.sigma',
        'window.width',
        'coincidences.raw',
        'coincidences.net',
        'accidentals.product',
        'accidentals.shifted',
        'accidentals.sideband',
        'car',
        'heralding.signal',
        'heralding.idler',
        'g2.peak',
      ].sort(),
    );
    expect(Object.keys(maps)).toEqual([
      'delay.histogram',
      'rates.signal',
      'rates.idler',
      'singles.signal',
      'singles.idler',
    ]);
    expect(Object.keys(chosen).sort()).toEqual(['delay', 'histogram.bin', 'shift.step', 'window']);
    expect(chosen['shift.step']).toBe(20_000);
    expect(statement).toContain('(C - A)/A');
    expect(statement).toContain(
      `centred on ${Math.round((run.tally.window.loTick + run.tally.window.hiTick) / 2)} ps`,
    );
    expect(statement).toContain('accidentals subtracted');
    for (const map of Object.values(maps)) {
      expect(map.data.length).toBe(map.shape.reduce((a, b) => a * b));
    }
  });

  it('keeps four sigma of the peak it found', () => {
    expect(Math.abs(run.output.chosen.delay! - 3210)).toBeLessThan(30);
    expect(run.output.chosen.window! / run.output.quantities['delay.sigma']!.value).toBeCloseTo(4, 1);
  });

  it('draws a rate map whose area is the number of tags', () => {
    const { data, axes } = run.output.maps['rates.signal']!;
    const { seconds } = { seconds: run.tally.sliceTick * 1e-12 };
    expect(axes[0]?.step).toBeCloseTo(seconds, 12);
    const inner = [...data.keys()].slice(1, -1);
    const tags = inner.reduce((sum, k) => sum + data[k]! * seconds, 0);
    const expected = inner.reduce((sum, k) => sum + run.tally.a.singlesPerSlice[k]!, 0);
    expect(tags / expected).toBeCloseTo(1, 9);
  });

  it('counts the same raw pairs for any split of the block', () => {
    const input = tagInput(detector, block.count, 1000);
    const spec = delayStudy.spec(input, fillDials(delayStudy.info, {}), run.chosen);
    if (spec.kind !== 'tags') throw new Error('tags expected');
    const first = createTagAccumulator(spec);
    const second = createTagAccumulator(spec);
    const cut = Math.floor(block.count / 3);
    const part = (from: number, to: number) => ({
      ...block,
      deltaTick: block.deltaTick.slice(from, to),
      channel: block.channel.slice(from, to),
      count: to - from,
      records: to - from,
    });
    first.push(part(0, cut));
    second.push(part(cut, block.count));
    first.merge(second);
    const tally = first.tally();
    const inputs = { tags: { ...input, tally, chosen: run.chosen } };
    const again = delayStudy.finish({
      inputs,
      dials: fillDials(delayStudy.info, {}),
      seed: 1,
      partial: false,
    });
    expect(again.quantities).toEqual(run.output.quantities);
  });

  it('turns the sign of the delay when the arms change places', () => {
    const swapped: TagDetector = { ...detector, signal: detector.idler, idler: detector.signal };
    const { output } = runTagStudy(delayStudy, block, swapped);
    expect(output.quantities['delay.peak']!.value).toBeCloseTo(
      -run.output.quantities['delay.peak']!.value,
      0,
    );
    expect(output.quantities['singles.signal']!.n).toBe(run.output.quantities['singles.idler']!.n);
  });

  it('finds the peak at zero when the map takes the delay out', () => {
    const aligned: TagDetector = { ...detector, idler: { ...detector.idler!, delayPs: -3210 } };
    const { output } = runTagStudy(delayStudy, block, aligned);
    expect(Math.abs(output.quantities['delay.peak']!.value)).toBeLessThan(30);
  });

  it('takes a bucket in place of an array', () => {
    const { output } = runTagStudy(delayStudy, block, {
      version: 1,
      kind: 'tags',
      bucket: { channel: 3, delayPs: 0 },
      idler: detector.idler,
    });
    expect(output.quantities['singles.bucket']?.value).toBeGreaterThan(1000);
    expect(output.quantities['heralding.idler']?.value).toBeGreaterThan(0.1);
    expect(output.maps['singles.bucket']).toBeUndefined();
    // Fifteen of sixteen signal pixels now belong to no arm.
    expect(statusOf(output, 'tags-mapped')).toBe('caution');
  });

  it('keeps what a person has set and chooses the rest', () => {
    const delaySet = runTagStudy(delayStudy, block, detector, { delay: 3300 });
    expect(Object.keys(delaySet.output.chosen).sort()).toEqual(['histogram.bin', 'shift.step', 'window']);
    expect(delaySet.chosen.delay).toBe(3300);
    expect(delaySet.chosen.window! / run.chosen.window!).toBeCloseTo(1, 1);
    const windowSet = runTagStudy(delayStudy, block, detector, { window: 600, 'histogram.bin': 50 });
    expect(Object.keys(windowSet.output.chosen)).toEqual(['delay', 'shift.step']);
    expect(windowSet.output.quantities['window.width']?.value).toBe(600);
    expect(windowSet.output.maps['delay.histogram']?.axes[0]?.step).toBeCloseTo(0.05, 12);
  });

  it('needs no search when delay and window are set', () => {
    const set = { delay: 3210, window: 1000 };
    const { output, chosen } = runTagStudy(delayStudy, block, detector, set);
    expect(chosen).toEqual({});
    expect(Object.keys(output.chosen)).toEqual(['histogram.bin', 'shift.step']);
    expect(output.quantities['window.width']?.value).toBe(1000);
  });
});

describe('Delay says what is wrong', () => {
  const withDials = (dials: Record<string, number>): StudyOutput =>
    runTagStudy(delayStudy, block, detector, dials).output;

  it('when no peak stands out', () => {
    const dark = pairStream({ ...stream, pairRate: 0 }, 9);
    const { output } = runTagStudy(delayStudy, dark, detector);
    expect(statusOf(output, 'peak-found')).toBe('fail');
    expect(statusOf(output, 'pairs-enough')).toBe('fail');
    expect(output.quantities['delay.peak']).toBeUndefined();
    expect(output.quantities['heralding.signal']).toBeUndefined();
  });

  it('when the window cuts the peak or misses its centre', () => {
    expect(statusOf(withDials({ window: 300 }), 'window-cuts-peak')).toBe('fail');
    expect(statusOf(withDials({ delay: 3210 + 250, window: 1000 }), 'peak-centred')).toBe('caution');
    expect(statusOf(withDials({ delay: 3210 + 500, window: 1000 }), 'peak-centred')).toBe('fail');
    expect(statusOf(withDials({ delay: 20000, window: 1000 }), 'peak-found')).toBe('fail');
  });

  it('when a shifted window still counts pairs of the peak', () => {
    // Sigma 212 ps: 1000 + 5 * 212 = 2060 ps are clear.
    const near = withDials({ window: 1000, 'shift.step': 2000 });
    expect(statusOf(near, 'accidentals-agree')).toBe('fail');
    expect(near.checks.find(({ id }) => id === 'accidentals-agree')!.sentence).toContain(
      'Set the shifted-window step to 3 ns or more',
    );
    expect(statusOf(withDials({ window: 1000, 'shift.step': 3000 }), 'accidentals-agree')).toBe('pass');
  });

  it('and steps clear of a broad peak and of a wide window by itself', () => {
    const broad = pairStream({ ...stream, jitterPs: [2500, 2500] }, 8);
    const { output, chosen } = runTagStudy(delayStudy, broad, detector, { window: 3000 });
    expect(output.chosen['shift.step']).toBe(Math.ceil(chosen.sigma! / 100) * 1000);
    expect(output.chosen['shift.step']).toBeGreaterThan(30_000);
    expect(withDials({ window: 15_000 }).chosen['shift.step']).toBe(30_000);
  });

  it('when the source drifts, and then reports the larger error', () => {
    const drifting = pairStream({ ...stream, brightness: (at) => 1 - 0.7 * at }, 5);
    const { output } = runTagStudy(delayStudy, drifting, detector);
    expect(statusOf(output, 'drift')).toBe('fail');
    expect(statusOf(output, 'excess-noise')).toBe('caution');
    expect(output.quantities['singles.signal']?.method).toContain('block bootstrap');
  });

  it('when a pixel is hot or dead', () => {
    const odd = pairStream(
      {
        ...stream,
        land: (r) => {
          const [a, b] = stream.land(r);
          return [a === 5 ? -1 : a, b];
        },
        darkChannel: (arm, r) => (arm === 1 && r.uniform() < 0.9 ? 110 : arm === 0 ? 6 : 100 + r.below(16)),
      },
      6,
    );
    const { output } = runTagStudy(delayStudy, odd, detector);
    const check = output.checks.find(({ id }) => id === 'pixels-sound');
    expect(check?.status).toBe('caution');
    expect(check?.sentence).toContain('signal (1, 1) dead');
    expect(check?.sentence).toContain('idler (2, 2) hot');
  });

  it('when a pixel is faster than its dead time bears', () => {
    const status = (ns: number) => statusOf(withDials({ 'dead.time': ns }), 'pixels-saturated');
    // The busiest of 16 pixels counts about 5000 tags/s: 10 us lose 5 %, 30 us 15 %, 1 ms cannot be.
    expect([status(50), status(10_000), status(30_000), status(1_000_000)]).toEqual([
      'pass',
      'caution',
      'fail',
      'fail',
    ]);
  });

  it('when a stretch of the run is empty', () => {
    const gap = pairStream(
      { ...stream, brightness: (at) => (at > 0.3 && at < 0.5 ? 0 : 1), darks: [0, 0] },
      7,
    );
    const { output } = runTagStudy(delayStudy, gap, detector);
    expect(statusOf(output, 'live-time')).toBe('fail');
    // The rate is that while light fell: 40 000 + darks would be a fifth lower over the whole span.
    const { value, sigma } = output.quantities['singles.signal']!;
    expect(Math.abs(value - 4e4)).toBeLessThan(5 * sigma! + 0.03 * 4e4);
    expect(output.quantities['accidentals.product']).toBeUndefined();
    expect(output.quantities['g2.peak']).toBeUndefined();
  });

  /** Uniform darks on both arms in stretches of ticks. */
  const stretches = (list: readonly (readonly [from: number, length: number, tags: number])[]): TagBlock => {
    const random = createRandom(12);
    const times = list.flatMap(([from, length, tags]) =>
      Array.from({ length: tags }, () => from + Math.floor(length * random.uniform())).sort((p, q) => p - q),
    );
    return {
      kind: 'tags',
      baseTick: 0n,
      deltaTick: Float64Array.from(times),
      channel: Uint16Array.from(times, () => (random.uniform() < 0.5 ? 0 : 100) + random.below(16)),
      count: times.length,
      records: times.length,
      firstRecord: 0,
      bytes: 0,
    };
  };
  const rateIds = (output: StudyOutput): string[] =>
    Object.entries(output.quantities).flatMap(([id, { unit }]) => (unit === '1/s' ? [id] : []));

  it('when most of the time between the first and the last tag is a gap, and then gives no rate', () => {
    const twoRuns = stretches([
      [0, 1e10, 20_000],
      [1e13, 1e10, 20_000],
    ]);
    const strayTag = stretches([
      [0, 1e9, 5000],
      [2 ** 52, 1, 1],
    ]);
    for (const tags of [twoRuns, strayTag]) {
      const { output } = runTagStudy(delayStudy, tags, detector);
      const check = output.checks.find(({ id }) => id === 'live-time')!;
      expect(check.status).toBe('fail');
      expect(check.sentence).toContain('no rate is given');
      expect(rateIds(output)).toEqual([]);
      expect(output.quantities['g2.peak']).toBeUndefined();
      expect(output.checks.find(({ id }) => id === 'baseline-flat')!.figure).toBeNull();
      expect(output.checks.find(({ id }) => id === 'pairs-enough')!.sentence).not.toContain('Only -');
    }
  });

  it('when every tag carries the same time', () => {
    const { output } = runTagStudy(delayStudy, stretches([[77, 1, 2000]]), detector);
    const check = output.checks.find(({ id }) => id === 'live-time')!;
    expect(check.status).toBe('fail');
    expect(check.sentence).toContain('time field of the layout');
    expect(rateIds(output)).toEqual([]);
  });

  it('when there are too few tags for a rate', () => {
    const { output } = runTagStudy(delayStudy, stretches([[0, 1e9, 9]]), detector);
    expect(rateIds(output)).toEqual([]);
    const ten = runTagStudy(delayStudy, stretches([[0, 1e9, 10]]), detector).output;
    expect(rateIds(ten)).toContain('singles.signal');
  });

  it('before counting, when the map or the dials cannot work', () => {
    const input = tagInput(detector, 10, 1000);
    const validate = (map: TagDetector, dials: Record<string, number> = {}) =>
      delayStudy.validate({ tags: { ...input, detector: map } }, fillDials(delayStudy.info, dials));
    expect(() => validate(detector)).not.toThrow();
    expect(() => validate({ version: 1, kind: 'tags', signal: detector.signal })).toThrow(/signal and idler/);
    expect(() => validate({ ...detector, idler: arrayMap(4, 4, 10) })).toThrow(/Channel 10 is in both arms/);
    expect(() => validate({ ...detector, idler: arrayMap(4, 4, 65530) })).toThrow(/past 65535/);
    const masked = { ...arrayMap(4, 4, 100), maskedPixels: [16] };
    expect(() => validate({ ...detector, idler: masked })).toThrow(/Masked pixel 16/);
    expect(() => validate(detector, { window: 15000, 'shift.step': 20000 })).toThrow(/shift\.step/);
    expect(() => validate(detector, { window: 15000 })).not.toThrow();
    expect(() => validate(detector, { window: -1 })).toThrow(
      /"window".*takes a number from 1 to 10000000 ps/,
    );
    expect(() => validate(detector, { colour: 1 })).toThrow(/no dial "colour"/);
    expect(() => validate(detector, { 'shift.count': 1.5 })).toThrow(/whole number/);
    expect(() => delayStudy.validate({}, fillDials(delayStudy.info, {}))).toThrow(/"tags" is missing/);
  });

  it('and survives an empty and a one-tag file', () => {
    for (const count of [0, 1]) {
      const { output } = runTagStudy(
        delayStudy,
        {
          ...block,
          deltaTick: block.deltaTick.slice(0, count),
          channel: block.channel.slice(0, count),
          count,
          records: count,
        },
        detector,
      );
      expect(statusOf(output, 'peak-found')).toBe('fail');
      for (const { value, sigma } of Object.values(output.quantities)) {
        expect(Number.isFinite(value) && Number.isFinite(sigma ?? 0)).toBe(true);
      }
    }
  });
});
