import { describe, expect, it } from 'vitest';
import { windowFraction } from '../../../../shared/physics/timing';
import type { Random } from '../../../../shared/util/random';
import { delayStudy } from '../../../../workers/studies/delay/study';
import { type PairStream, pairStream } from '../../../support/pair-stream';
import { arrayMap, runTagStudy } from '../../../support/run-study';
import { seedStatistics } from '../../../support/seed-statistics';

const PAIRS = 2e5;
const ETA = [0.2, 0.25] as const;
const DARKS = [2e4, 3e4] as const;
const SECONDS = 0.2;
const PEAK_SIGMA = 150 * Math.SQRT2;
const DELAY = 3210;
const SEEDS = 100;

const stream: PairStream = {
  seconds: SECONDS,
  tickFs: 1000,
  pairRate: PAIRS,
  jitterPs: [150, 150],
  delayPs: DELAY,
  darks: [...DARKS],
  land: (r: Random) => [
    r.uniform() < ETA[0] ? r.below(16) : -1,
    r.uniform() < ETA[1] ? 100 + r.below(16) : -1,
  ],
  darkChannel: (arm, r) => arm * 100 + r.below(16),
};
const detector = {
  version: 1 as const,
  kind: 'tags' as const,
  signal: arrayMap(4, 4, 0),
  idler: arrayMap(4, 4, 100),
};
// 1 ns holds some accidentals; 100 shifted windows give the CAR an error of a few percent.
const dials = {
  'dark.signal': DARKS[0],
  'dark.idler': DARKS[1],
  'shift.count': 100,
  'histogram.range': 50,
  resamples: 200,
};

describe('Delay on simulated pairs of known truth', () => {
  const runs = Array.from({ length: SEEDS }, (_, n) =>
    runTagStudy(delayStudy, pairStream(stream, n + 1), detector, dials),
  );
  const singles = [PAIRS * ETA[0] + DARKS[0], PAIRS * ETA[1] + DARKS[1]] as const;
  const truthOf = ({ output }: (typeof runs)[number]): Record<string, number> => {
    const width = output.quantities['window.width']!.value;
    // The window is the run's own choice; what it truly keeps follows from the true peak.
    const kept = windowFraction(width, PEAK_SIGMA, (output.chosen.delay ?? 0) - DELAY);
    const pairs = PAIRS * ETA[0] * ETA[1] * kept;
    const accidentals = singles[0] * singles[1] * width * 1e-12;
    return {
      'singles.signal': singles[0],
      'singles.idler': singles[1],
      'delay.peak': DELAY,
      'delay.sigma': PEAK_SIGMA,
      'coincidences.raw': pairs + accidentals,
      'coincidences.net': pairs,
      'accidentals.product': accidentals,
      'accidentals.shifted': accidentals,
      'accidentals.sideband': accidentals,
      car: pairs / accidentals,
      'heralding.signal': ETA[0],
      'heralding.idler': ETA[1],
    };
  };

  it.each(Object.keys(truthOf(runs[0]!)))('%s is unbiased and its error is right', (id) => {
    const found = runs.map((run) => {
      const { value, sigma } = run.output.quantities[id]!;
      return { value, sigma, truth: truthOf(run)[id]! };
    });
    const { bias, coverage } = seedStatistics(found);
    // Two standard errors for one number; with twelve asked at once the same chance of a false alarm is at 2.9. Over 600
    // seeds all stay within 2.2.
    expect(Math.abs(bias)).toBeLessThan(2.9);
    expect(coverage).toBeGreaterThanOrEqual(0.55);
    expect(coverage).toBeLessThanOrEqual(0.8);
  });

  it('fails no check on a sound run', () => {
    const failed = runs.flatMap(({ output }) => output.checks.filter((check) => check.status === 'fail'));
    expect(failed).toEqual([]);
  });

  it('leaves out what only its flaw would cause: few cautions in all', () => {
    const cautions = runs.flatMap(({ output }) =>
      output.checks.filter((check) => check.status === 'caution' && check.id !== 'pairs-enough'),
    );
    // Twelve checks at about three standard errors each.
    expect(cautions.length / SEEDS).toBeLessThan(0.15);
  });
});
