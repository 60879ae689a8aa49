import { describe, expect, it } from 'vitest';
import type { TagTally } from '../../../../shared/contracts/tally';
import { farFieldK } from '../../../../shared/physics/calibration';
import { createRandom } from '../../../../shared/util/random';
import { fillDials } from '../../../../workers/studies/dials';
import { jointMapStudy } from '../../../../workers/studies/joint-map/study';
import { simulateTally, type TallyScene } from '../../../physics/simulated-tally';
import { countedTags, farPlane, nearPlane, PITCH_UM } from '../../../physics/study-inputs';

const scene: TallyScene = {
  size: 16,
  slices: 80,
  truth: { v1: 8, v2: 8, c: 7 },
  centre: 7.5,
  pairs: 4000,
  accidentals: 400,
  windows: 10,
};

function finish(tally: TagTally, plane: typeof nearPlane | typeof farPlane = nearPlane, partial = false) {
  const dials = fillDials(jointMapStudy.info, { resamples: 200 });
  return jointMapStudy.finish({ inputs: { data: countedTags(tally, plane) }, dials, seed: 1, partial });
}
const status = (output: ReturnType<typeof finish>, id: string) =>
  output.checks.find((check) => check.id === id)?.status;

describe('Joint map', () => {
  const tally = simulateTally(scene, createRandom(1));
  const output = finish(tally);

  it('gives widths in um with errors, method and pairs', () => {
    for (const id of ['minus', 'plus', 'conditional']) {
      for (const way of ['fit', 'moment']) {
        const quantity = output.quantities[`width.x.${id}.${way}`]!;
        expect(quantity.unit).toBe('um');
        expect(quantity.sigma).toBeGreaterThan(0);
        expect(quantity.method).toContain('block bootstrap, 80 slices');
        expect(quantity.n).toBeGreaterThan(3000);
      }
    }
    expect(output.quantities['correlation.x']!.value).toBeGreaterThan(0.8);
    expect(output.quantities['coincidences.net']!.unit).toBe('1/s');
  });

  it('holds every map at its shape, with model and ellipse', () => {
    const joint = output.maps['joint.x']!;
    expect(joint.shape).toEqual([16, 16]);
    expect(joint.axes[0]!.label).toBe('x signal');
    expect(joint.axes[0]!.step).toBeCloseTo(PITCH_UM / 2, 12);
    expect(joint.axes[0]!.start).toBeCloseTo(-7.5 * (PITCH_UM / 2), 9);
    expect(joint.ellipse!.xx).toBeGreaterThan(0);
    expect(Math.abs(joint.ellipse!.x)).toBeLessThan(PITCH_UM / 4);
    for (const [id, map] of Object.entries(output.maps)) {
      const size = map.shape.reduce((a, b) => a * b, 1);
      expect(map.data.length, id).toBe(size);
      expect(map.sigma?.length ?? size, id).toBe(size);
      expect(map.model?.length ?? size, id).toBe(size);
      expect(map.masked?.length ?? size, id).toBe(size);
    }
    // The projection is the joint map summed along its diagonals, and the model has as many pairs as the data.
    const sum = (values: Float64Array) => values.reduce((a, b) => a + b, 0);
    expect(sum(output.maps['minus.x']!.data)).toBeCloseTo(sum(joint.data), 6);
    expect(sum(output.maps.difference!.data)).toBeCloseTo(sum(joint.data), 6);
    // Planar map and projection run the same way: signal minus idler.
    const planar = output.maps.difference!;
    const line = output.maps['minus.x']!;
    const { start, step } = line.axes[0]!;
    expect(planar.axes[0]).toMatchObject({ start, step });
    const [rows, columns] = planar.shape as [number, number];
    line.data.forEach((value, x) => {
      let column = 0;
      for (let y = 0; y < rows; y++) column += planar.data[y * columns + x]!;
      expect(column).toBeCloseTo(value, 6);
    });
    expect(Math.abs(sum(output.maps['minus.x']!.model!) / sum(joint.data) - 1)).toBeLessThan(0.02);
  });

  it('passes its checks on healthy data', () => {
    for (const check of output.checks) expect(check.status, check.id).not.toBe('fail');
    expect(status(output, 'correlation-sign')).toBe('pass');
    expect(status(output, 'fit-good')).toBe('pass');
  });

  it('takes far-field tags in rad/mm', () => {
    const far = simulateTally({ ...scene, truth: { ...scene.truth, c: -7 } }, createRandom(2));
    const found = finish(far, farPlane).quantities['width.x.plus.fit']!;
    expect(found.unit).toBe('rad/mm');
    const truth = farFieldK(PITCH_UM, 810, 100) * Math.sqrt(2 + 1 / 6);
    expect(Math.abs(found.value - truth)).toBeLessThan(4 * found.sigma!);
  });

  it('says which axis to flip when the near field is anti-correlated', () => {
    const flipped = finish(simulateTally({ ...scene, truth: { ...scene.truth, c: -7 } }, createRandom(3)));
    const check = flipped.checks.find(({ id }) => id === 'correlation-sign')!;
    expect(check.status).toBe('fail');
    expect(check.sentence).toContain('flip x and y of one arm');
  });

  it('fails on too few pairs, cautions on a cut map', () => {
    const few = finish(simulateTally({ ...scene, pairs: 120 }, createRandom(4)));
    expect(status(few, 'pairs-enough')).toBe('fail');
    const broad = finish(simulateTally({ ...scene, truth: { v1: 40, v2: 40, c: 39 } }, createRandom(5)));
    expect(['caution', 'fail']).toContain(status(broad, 'map-truncated'));
  });

  it('gives no width of a variance that is not clear of zero, and no moments of few pairs', () => {
    const widthsOf = (found: ReturnType<typeof finish>) =>
      Object.entries(found.quantities).filter(([id]) => id.startsWith('width'));
    for (const [pairs, accidentals, seed] of [
      [120, 400, 4],
      [250, 20_000, 21],
      [250, 20_000, 22],
      [400, 20_000, 23],
    ] as const) {
      const found = finish(simulateTally({ ...scene, pairs, accidentals }, createRandom(seed)));
      const few = status(found, 'pairs-enough') === 'fail';
      for (const [id, { value, sigma }] of widthsOf(found)) {
        // A variance three errors above zero has a width six errors above it.
        expect(value, id).toBeGreaterThan(5.5 * sigma!);
        if (few) expect(id).not.toContain('moment');
      }
    }
  });

  it('says to magnify, not to measure longer, where pairs are narrower than the pixels', () => {
    // Both photons of a pair on one pixel, always.
    const onPixels: TallyScene = { ...scene, truth: { v1: 9, v2: 9, c: 9 }, pairs: 20_000, accidentals: 10 };
    const found = finish(simulateTally(onPixels, createRandom(31)));
    const check = (id: string) => found.checks.find((one) => one.id === id)!;
    expect(check('fit-good').status).toBe('caution');
    expect(check('fit-good').sentence).toContain('more narrowly than the pixels are wide');
    expect(check('pixels-fine').sentence).toContain('magnify more');
    expect(check('correlation-sign').status).toBe('pass');
    expect(Object.keys(found.quantities).filter((id) => id.endsWith('.fit'))).toEqual([]);
    for (const id of ['fit-good', 'map-truncated', 'pixels-fine', 'width-drift', 'excess-noise']) {
      expect(check(id).figure, id).toBeNull();
    }
  });

  it('does not take a fit that noise drove below a pixel for narrow pairs', () => {
    for (let seed = 40; seed < 50; seed += 1) {
      const weak: TallyScene = { ...scene, truth: { v1: 9, v2: 9, c: 8.9 }, pairs: 40, accidentals: 1500 };
      const found = finish(simulateTally(weak, createRandom(seed)));
      const check = found.checks.find(({ id }) => id === 'fit-good')!;
      if (check.sentence.includes('more narrowly')) expect(status(found, 'correlation-sign')).toBe('pass');
    }
  });

  it('takes no figure from a fit that found nothing', () => {
    const found = finish(simulateTally({ ...scene, pairs: 0, accidentals: 0 }, createRandom(32)));
    for (const id of [
      'fit-good',
      'map-truncated',
      'correlation-sign',
      'pixels-fine',
      'width-drift',
      'excess-noise',
    ]) {
      const check = found.checks.find((one) => one.id === id)!;
      expect(check.figure, id).toBeNull();
      expect(check.status, id).not.toBe('pass');
    }
    expect(found.maps['joint.x']!.model).toBeUndefined();
  });

  it('gives no number from fewer than eight slices, but still the maps', () => {
    const short = finish(simulateTally({ ...scene, slices: 4 }, createRandom(6)));
    expect(status(short, 'slices-enough')).toBe('fail');
    expect(short.quantities['width.x.minus.fit']).toBeUndefined();
    expect(short.maps['joint.x']!.data.length).toBe(256);
  });

  it('makes no number of an empty tally', () => {
    const empty = simulateTally({ ...scene, pairs: 0, accidentals: 0 }, createRandom(7));
    const found = finish(empty);
    expect(Object.keys(found.quantities).filter((id) => id.startsWith('width'))).toEqual([]);
    expect(status(found, 'fit-good')).toBe('fail');
  });

  it('keeps its width when a column and single pixels are masked', () => {
    const masked = simulateTally(scene, createRandom(8));
    for (let y = 0; y < 16; y += 1) {
      masked.a.masked[y * 16 + 5] = 1;
      masked.a.singles[y * 16 + 5] = 0;
    }
    for (let s = 0; s < masked.slices; s += 1) {
      for (let x2 = 0; x2 < 16; x2 += 1) {
        masked.prompt.jointX[s * 256 + x2 * 16 + 5] = 0;
        masked.shifted.jointX[s * 256 + x2 * 16 + 5] = 0;
      }
    }
    const found = finish(masked).quantities['width.x.minus.fit']!;
    const truth = (PITCH_UM / 2) * Math.sqrt(2 + 1 / 6);
    expect(Math.abs(found.value - truth)).toBeLessThan(4 * found.sigma!);
    expect(finish(masked).maps['joint.x']!.masked![5]).toBe(1);
  });

  it('answers the same twice, and quickly enough with 1000 resamples on 64 x 64', () => {
    const again = finish(tally);
    expect(again.quantities).toEqual(output.quantities);
    const large = simulateTally(
      { ...scene, size: 64, centre: 31, truth: { v1: 120, v2: 120, c: 116 }, slices: 128 },
      createRandom(9),
    );
    const dials = fillDials(jointMapStudy.info, { resamples: 1000 });
    const data = countedTags(large, nearPlane);
    const used = process.cpuUsage();
    jointMapStudy.finish({ inputs: { data }, dials, seed: 1, partial: false });
    const { user, system } = process.cpuUsage(used);
    // 1 s is the aim on an idle core; processor time on a shared, cold one may take thrice that.
    expect((user + system) / 1e6).toBeLessThan(3);
  });

  it('refuses inputs that lack a plane, a detector of their kind, or the file itself', () => {
    const dials = fillDials(jointMapStudy.info, {});
    const data = countedTags(tally, nearPlane);
    expect(() => jointMapStudy.validate({}, dials)).toThrow(/"data" is missing/);
    expect(() => jointMapStudy.validate({ data: { ...data, plane: null } }, dials)).toThrow(/no plane/);
    const facts = { kind: 'frames', frames: 10, width: 8, height: 8, type: 'uint8', reader: 'test' } as const;
    expect(() => jointMapStudy.validate({ data: { ...data, facts } }, dials)).toThrow(/map of a camera/);
    const detector = { version: 1, kind: 'frames', pitchUm: 10, maskedPixels: [64] } as const;
    const frames = { ...data, facts, detector: { ...detector, maskedPixels: [...detector.maskedPixels] } };
    expect(() => jointMapStudy.validate({ data: frames }, dials)).toThrow(/Masked pixel 64/);
  });
});
