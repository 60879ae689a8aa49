import { describe, expect, it } from 'vitest';
import { createRandom } from '../../../../shared/util/random';
import { fillDials } from '../../../../workers/studies/dials';
import type { CountedInput } from '../../../../workers/studies/study';
import { witnessStudy } from '../../../../workers/studies/witness/study';
import { simulateFrames } from '../../../physics/simulated-frames';
import { simulateTally, type TallyScene } from '../../../physics/simulated-tally';
import { countedFrames, countedTags, farPlane, nearPlane } from '../../../physics/study-inputs';

const scene: TallyScene = {
  size: 16,
  slices: 80,
  truth: { v1: 12, v2: 12, c: 11 },
  centre: 7.5,
  pairs: 3000,
  accidentals: 300,
  windows: 10,
};
const near = countedTags(simulateTally(scene, createRandom(1)), nearPlane);
const far = countedTags(
  simulateTally({ ...scene, truth: { ...scene.truth, c: -11 } }, createRandom(2)),
  farPlane,
);
const dials = fillDials(witnessStudy.info, { resamples: 200 });
const finish = (inputs: Partial<Record<string, CountedInput>>, partial = false, seed = 1) =>
  witnessStudy.finish({ inputs, dials, seed, partial });

describe('Witness', () => {
  const output = finish({ near, far });

  it('gives each witness raw and net, with a verdict of its own', () => {
    for (const axis of ['x', 'y', 'xy']) {
      for (const what of ['raw', 'net']) {
        for (const [name, bound] of [
          ['reid', 0.25],
          ['mancini', 1],
        ] as const) {
          const id = `${name}.${axis}.${what}`;
          expect(output.quantities[id]!.unit, id).toBe('hbar^2');
          const verdict = output.verdicts[id]!;
          expect(verdict.bound).toBe(bound);
          const value = output.quantities[id]!.value;
          expect(verdict.interval[0]).toBeLessThan(value);
          expect(verdict.interval[1]).toBeGreaterThan(value);
        }
      }
    }
    expect(output.verdicts['reid.x.net']!.sentence).toContain('fair sampling, uncorrelated accidentals');
    expect(output.verdicts['reid.x.raw']!.sentence).toContain('nothing is subtracted');
  });

  it('keeps the order that theory demands: net below raw, Reid below Mancini', () => {
    const value = (id: string) => output.quantities[id]!.value;
    expect(value('reid.x.net')).toBeLessThan(value('reid.x.raw'));
    expect(value('mancini.x.net')).toBeLessThan(value('mancini.x.raw'));
    expect(value('reid.x.net')).toBeLessThan(value('mancini.x.net'));
    expect(value('schmidt.x')).toBeCloseTo(1 / (2 * Math.sqrt(value('reid.x.net'))), 12);
    expect(value('schmidt')).toBeCloseTo(value('schmidt.x') * value('schmidt.y'), 9);
    expect(value('reid.xy.net')).toBeCloseTo(Math.sqrt(value('reid.x.net') * value('reid.y.net')), 12);
    expect(value('fedorov.x')).toBeGreaterThan(1);
  });

  it('names maps, checks and choices by their plane', () => {
    for (const id of ['joint.x.near', 'joint.y.far', 'delay.histogram.near', 'sum.far', 'difference.near']) {
      expect(output.maps[id], id).toBeDefined();
    }
    for (const id of ['peak-found.near', 'pairs-enough.far', 'same-pixels', 'calibration-known']) {
      expect(output.checks.find((check) => check.id === id)?.status, id).toBe('pass');
    }
    expect(output.chosen['delay.near']).toBe(0);
    expect(output.chosen['window.far']).toBe(2100);
  });

  const verdictsOf = (found: ReturnType<typeof finish>) => Object.values(found.verdicts);
  const claim = /this (shows|indicates)/;

  it('gives uncorrelated light no verdict', () => {
    const flat = { ...scene, truth: { v1: 8, v2: 8, c: 0 } };
    const found = finish({
      near: countedTags(simulateTally(flat, createRandom(3)), nearPlane),
      far: countedTags(simulateTally(flat, createRandom(4)), farPlane),
    });
    expect(new Set(verdictsOf(found).map(({ level }) => level))).toEqual(new Set(['inconclusive']));
    expect(found.verdicts['reid.x.net']!.sentence).toContain(
      'near field the two arms are not seen to be correlated',
    );
    expect(found.checks.find(({ id }) => id === 'correlation-sign.near')?.status).not.toBe('pass');
  });

  it('gives pairs that land anywhere on 4 x 4 pixels no verdict, though their moments lie below the bounds', () => {
    // Coincident in time, independent in place: a law much wider than the array, without correlation.
    const anywhere: TallyScene = { ...scene, size: 4, centre: 1.5, truth: { v1: 64, v2: 64, c: 0 } };
    const many = { ...anywhere, pairs: 2e6, accidentals: 2e5 };
    const found = finish({
      near: countedTags(simulateTally(many, createRandom(8)), {
        ...nearPlane,
        magnification: { value: 4, sigma: 0.04 },
      }),
      far: countedTags(simulateTally(many, createRandom(9)), {
        ...farPlane,
        focalLengthMm: { value: 22, sigma: 0.2 },
      }),
    });
    const reid = found.verdicts['reid.x.raw']!;
    expect(found.quantities['reid.x.raw']!.value).toBeLessThan(0.1);
    expect(reid.significance).toBeGreaterThan(50);
    expect(new Set(verdictsOf(found).map(({ level }) => level))).toEqual(new Set(['inconclusive']));
    for (const text of [found.statement, ...verdictsOf(found).map(({ sentence }) => sentence)]) {
      expect(text).not.toMatch(claim);
    }
    expect(found.statement).toContain('No verdict on the Reid product in x');
  });

  it('gives truncated maps no verdict, raw or net, however strong the correlation', () => {
    // Nine tenths of these pairs miss the arrays: their moments are those of the arrays.
    const wide: TallyScene = { ...scene, pairs: 60_000, truth: { v1: 400, v2: 400, c: 396 } };
    const far = { ...wide, truth: { ...wide.truth, c: -396 } };
    const found = finish({
      near: countedTags(simulateTally(wide, createRandom(10)), nearPlane),
      far: countedTags(simulateTally(far, createRandom(11)), farPlane),
    });
    expect(found.checks.find(({ id }) => id === 'map-truncated.near')?.status).toBe('fail');
    expect(found.verdicts['reid.x.raw']!.level).toBe('inconclusive');
    expect(found.verdicts['reid.x.raw']!.sentence).toContain('miss the arrays');
    expect(found.statement).not.toMatch(claim);
  });

  it('only indicates what twice the calibration error would take to the bound', () => {
    const level = (sigma: number) => {
      const plane = { ...nearPlane, magnification: { value: 0.5, sigma } };
      return finish({ near: { ...near, plane }, far }).verdicts['mancini.x.net']!.level;
    };
    expect(level(0.005)).toBe('violated');
    expect(level(0.1)).toBe('indicated');
    const unsure = { ...nearPlane, magnification: { value: 0.5, sigma: 0.1 } };
    const found = finish({ near: { ...near, plane: unsure }, far });
    expect(found.verdicts['mancini.x.net']!.sentence).toContain('calibration error');
    expect(found.checks.find(({ id }) => id === 'calibration-known')?.sentence).toContain('mancini.x.net');
  });

  it('cautions when the planes were taken with different pixels', () => {
    const detector = structuredClone(far.detector);
    if (detector.kind === 'tags') detector.signal!.maskedPixels = [7];
    const found = finish({ near, far: { ...far, detector } });
    const check = found.checks.find(({ id }) => id === 'same-pixels')!;
    expect(check.status).toBe('caution');
    expect(check.sentence).toContain('mask of the signal array');
  });

  it('looks while the far field is still missing, and says so', () => {
    const found = finish({ near }, true);
    expect(found.verdicts).toEqual({});
    expect(found.quantities['width.x.minus.net']).toBeDefined();
    expect(found.quantities['reid.x.net']).toBeUndefined();
    expect(found.statement).toContain('far-field acquisition is still to be read');
    const both = finish({ near, far }, true);
    expect(both.verdicts['reid.x.net']!.sentence).toMatch(/^So far, still reading/);
    expect(finish({}, true).quantities).toEqual({});
  });

  it('draws the planes apart and answers the same twice', () => {
    expect(finish({ near, far }).quantities).toEqual(output.quantities);
    const other = finish({ near, far }, false, 2);
    expect(other.quantities['reid.x.net']!.value).toBe(output.quantities['reid.x.net']!.value);
    const ratio = other.quantities['reid.x.net']!.sigma! / output.quantities['reid.x.net']!.sigma!;
    expect(Math.abs(ratio - 1)).toBeLessThan(0.25);
  });

  it('takes frames, net only, and bounds the Reid product by sum and difference', () => {
    const camera = {
      size: 24,
      frames: 800,
      blocks: 40,
      truth: { v1: 16.6, v2: 16.6, c: 15.4 },
      centre: 11.4,
      pairsPerFrame: 30,
      efficiency: 0.6,
      darksPerFrame: 4,
    };
    const opposite = { ...camera, truth: { ...camera.truth, c: -15.4 } };
    const found = finish({
      near: countedFrames(simulateFrames(camera, createRandom(5)), nearPlane),
      far: countedFrames(simulateFrames(opposite, createRandom(6)), farPlane),
    });
    expect(found.quantities['reid.x.raw']).toBeUndefined();
    expect(found.quantities['reid.x.net']!.value).toBe(found.quantities['mancini.x.net']!.value);
    expect(found.verdicts['reid.x.net']!.sentence).toContain('bounded from above');
    expect(found.verdicts['mancini.x.net']!.sentence).not.toContain('bounded from above');
    expect(found.quantities['schmidt.x']!.method).toMatch(/^lower bound .* Mancini product/);
    expect(output.quantities['schmidt.x']!.method).toMatch(/^1\/\(2 sqrt W\) with the Reid product/);
    expect(found.maps['minus.near']).toBeDefined();
    expect(found.maps['mean.frame.far']!.shape).toEqual([24, 24]);
  });

  it('refuses planes that are swapped', () => {
    expect(() => witnessStudy.validate({ near: far, far: near }, dials)).toThrow(/needs a near-field/);
    expect(() => witnessStudy.validate({ near }, dials)).toThrow(/"far" is missing/);
    expect(() => witnessStudy.validate({ near, far }, dials)).not.toThrow();
  });
});
