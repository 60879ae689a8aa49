import { describe, expect, it } from 'vitest';
import { createRandom } from '../../../../shared/util/random';
import { axisLaw, drawPair, type PairPosition, pairLaw } from '../../../../workers/simulate/pair-source';
import { jointMoments, pixelLaw } from '../../../../workers/simulate/pixel-law';
import { binsOf } from '../../../../workers/simulate/receivers';
import { truthOf } from '../../../../workers/simulate/truth';
import { source, tagScenario } from './scenarios';

describe('the double Gaussian', () => {
  it('has the width of the crystal', () => {
    // sqrt(alpha L lambda_p / (2 pi n_p)) for 2 mm, 405 nm, 1.66, 0.455: check value D06, derived by numerics.
    expect(pairLaw({ ...source, crystalMm: 2 }).birthUm).toBeCloseTo(5.944348043356229, 4);
  });

  it('gives the products and the Schmidt number of r = 4', () => {
    // Check values D08 (Law & Eberly, PRL 92, 127903 (2004), from memory), D09 and D10 (derived).
    const birthUm = pairLaw(source).birthUm;
    const truth = truthOf(tagScenario({ source: { ...source, pumpWaistUm: 4 * birthUm } }));
    expect(truth.schmidt).toBeCloseTo(2.125, 9);
    expect(truth.reid).toBeCloseTo(0.05536332179930796, 9);
    expect(truth.mancini).toBeCloseTo(0.0625, 9);
  });

  it('gives conditional widths of both planes', () => {
    // Check values D13 and D14 (derived): w 500 um, d 8 um -> 7.998976196566066 um and 1.9997440491415166 rad/mm.
    const alpha = (source.alpha * 8 ** 2) / pairLaw(source).birthUm ** 2;
    const wide = { ...source, pumpWaistUm: 500, alpha };
    const near = truthOf(tagScenario({ source: wide }));
    const far = truthOf(tagScenario({ source: wide, optics: { kind: 'far', focalLengthMm: 22 } }));
    expect(near.x.ideal.conditional).toBeCloseTo(7.998976196566066, 6);
    expect(far.x.ideal.conditional).toBeCloseTo(1.9997440491415166, 9);
  });

  it('adds a^2/6 of the pixel to a difference', () => {
    // Check value C02: 13 um -> 28.1667 um^2 (uniform law, derived).
    const truth = truthOf(
      tagScenario({
        optics: { kind: 'near', magnification: 1 },
        signal: { kind: 'array', efficiency: 1, width: 4, height: 4, pitchUm: 13, firstChannel: 0 },
        idler: { kind: 'array', efficiency: 1, width: 4, height: 4, pitchUm: 13, firstChannel: 16 },
      }),
    );
    expect(truth.x.blurred.minus ** 2 - truth.x.ideal.minus ** 2).toBeCloseTo(28.166666666666668, 9);
  });

  it('is what the draws follow, two-colour far field included', () => {
    const twoColour = { ...source, signalNm: 780, idlerNm: 842.4 };
    for (const optics of [
      { kind: 'near', magnification: 4 } as const,
      { kind: 'far', focalLengthMm: 22 } as const,
    ]) {
      const law = axisLaw(twoColour, optics);
      const random = createRandom(11);
      const at: PairPosition = [0, 0, 0, 0];
      const n = 100_000;
      let [minus, plus, ys] = [0, 0, 0];
      for (let i = 0; i < n; i++) {
        drawPair(law, random, at);
        minus += (at[0] / law.scaleSignal - at[2] / law.scaleIdler) ** 2;
        plus += (at[0] / law.scaleSignal + at[2] / law.scaleIdler) ** 2;
        ys += (at[1] / law.scaleSignal) * (at[0] / law.scaleSignal);
      }
      const { birthUm, waistUm } = pairLaw(twoColour);
      const expected =
        optics.kind === 'near' ? [birthUm ** 2, waistUm ** 2] : [1 / birthUm ** 2, 1 / waistUm ** 2];
      // Relative standard error of a variance of n normal values: sqrt(2/n); four of them.
      const reach = 4 * Math.sqrt(2 / n);
      expect(Math.abs(minus / n / expected[0]! - 1)).toBeLessThan(reach);
      expect(Math.abs(plus / n / expected[1]! - 1)).toBeLessThan(reach);
      // x and y are independent: standard error of the mean product is V/sqrt(n).
      const single = (expected[0]! + expected[1]!) / 4;
      expect(Math.abs(ys / n)).toBeLessThan((4 * single) / Math.sqrt(n));
    }
  });
});

describe('the pixel law', () => {
  it('sums to one on a field without edges, with the blurred moments', () => {
    const scenario = tagScenario({
      signal: { kind: 'array', efficiency: 1, width: 64, height: 1, pitchUm: 25, firstChannel: 0 },
      idler: { kind: 'array', efficiency: 1, width: 64, height: 1, pitchUm: 25, firstChannel: 64 },
    });
    const truth = truthOf(scenario).x;
    expect(truth.pixels.joint.reduce((sum, p) => sum + p, 0)).toBeCloseTo(1, 6);
    // Pixels half the narrow width wide: what is left of the a^2/12 rule's error is below 1e-4.
    expect(truth.recorded.minus / truth.blurred.minus).toBeCloseTo(1, 4);
    expect(truth.recorded.plus / truth.blurred.plus).toBeCloseTo(1, 4);
    expect(truth.recorded.conditional / truth.blurred.conditional).toBeCloseTo(1, 3);
  });

  it('agrees with counting drawn pairs, gaps between pixels and shifted arrays included', () => {
    const scenario = tagScenario({
      signal: { kind: 'array', efficiency: 1, width: 6, height: 6, pitchUm: 60, firstChannel: 0, fill: 0.6 },
      idler: {
        kind: 'array',
        efficiency: 1,
        width: 7,
        height: 7,
        pitchUm: 50,
        firstChannel: 64,
        axisUm: [20, -15],
      },
    });
    const law = axisLaw(scenario.source, scenario.optics);
    const [signal, idler] = [binsOf(scenario.signal, 'x'), binsOf(scenario.idler, 'x')];
    const { joint } = pixelLaw(law, signal, idler);
    const random = createRandom(5);
    const at: PairPosition = [0, 0, 0, 0];
    const n = 200_000;
    const counted = new Float64Array(joint.length);
    const binOf = (bins: typeof signal, x: number): number =>
      bins.low.findIndex((low, i) => x >= low && x < bins.high[i]!);
    for (let k = 0; k < n; k++) {
      drawPair(law, random, at);
      const [a, b] = [binOf(signal, at[0]), binOf(idler, at[2])];
      if (a >= 0 && b >= 0) counted[b * 6 + a]! += 1;
    }
    let chi2 = 0;
    let cells = 0;
    joint.forEach((p, i) => {
      if (p * n < 10) return;
      chi2 += (counted[i]! - p * n) ** 2 / (p * n);
      cells += 1;
    });
    // chi^2 has mean `cells` and variance 2 * cells.
    expect(Math.abs(chi2 - cells)).toBeLessThan(4 * Math.sqrt(2 * cells));
  });

  it('takes moments of a table', () => {
    // Two equal points (0,0) and (2,1): minus 0 and 1, plus 0 and 3; each column holds one point.
    const moments = jointMoments(Float64Array.of(1, 0, 0, 1), Float64Array.of(0, 2), Float64Array.of(0, 1));
    expect(moments).toEqual({ minus: 0.25, plus: 2.25, conditional: 0 });
  });
});
