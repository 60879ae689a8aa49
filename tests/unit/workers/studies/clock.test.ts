import { describe, expect, it } from 'vitest';
import type { StudyOutput } from '../../../../shared/contracts/output';
import { createRandom } from '../../../../shared/util/random';
import { fillDials } from '../../../../workers/studies/dials';
import { studies } from '../../../../workers/studies/registry';
import type { ClockFacts, CountedInput, Study } from '../../../../workers/studies/study';
import { simulateTally, type TallyScene } from '../../../physics/simulated-tally';
import { countedTags, farPlane, nearPlane } from '../../../physics/study-inputs';

const scene: TallyScene = {
  size: 16,
  slices: 80,
  truth: { v1: 8, v2: 8, c: 7 },
  centre: 7.5,
  pairs: 4000,
  accidentals: 400,
  windows: 10,
};
/** The peak was lost in most stretches. */
const clock: ClockFacts = {
  offset: { value: 1e9, sigma: 3 },
  drift: { value: 2e-6, sigma: 1e-12 },
  line: { stretches: 32, found: 17, residualPs: 4, chi2PerDof: 1, peakSigmaPs: 200 },
};
const given: ClockFacts = { ...clock, line: null };

function finish(study: Study, inputs: Record<string, CountedInput>): StudyOutput {
  return study.finish({ inputs, dials: fillDials(study.info, { resamples: 100 }), seed: 1, partial: false });
}

describe('A second clock is told by every study of tags', () => {
  const tally = simulateTally(scene, createRandom(1));
  const near = countedTags(tally, nearPlane);
  const far = countedTags(tally, farPlane);
  if (near.detector.kind !== 'tags') throw new Error('a detector map of channels was expected');
  const bucket = { channel: 999, delayPs: 0 };
  const withBucket: CountedInput = { ...near, detector: { ...near.detector, bucket } };

  it.each([
    ['delay', { tags: { ...near, clock } }],
    ['ghost-image', { tags: { ...withBucket, clock } }],
    ['joint-map', { data: { ...near, clock } }],
  ] as const)('%s', (id, inputs) => {
    const output = finish(studies[id], inputs);
    expect(output.quantities['clock.offset']).toMatchObject({ value: 1e9, sigma: 3, n: 17 });
    expect(output.quantities['clock.drift']?.value).toBe(2e-6);
    expect(output.checks.find((check) => check.id === 'clock-line')?.status).toBe('caution');
  });

  it('witness, each plane by itself', () => {
    const output = finish(studies.witness, { near: { ...near, clock: given }, far: { ...far, clock } });
    expect(output.quantities['clock.offset.near']).toMatchObject({ value: 1e9, sigma: null });
    expect(output.quantities['clock.offset.far']).toMatchObject({ value: 1e9, sigma: 3 });
    const told = output.checks.filter(({ id }) => id.startsWith('clock-line'));
    expect(told.map(({ id }) => id)).toEqual(['clock-line.far']);
    expect(told[0]!.sentence).toMatch(/^Far field: The coincidence peak was found in 17 of 32/);
  });
});
