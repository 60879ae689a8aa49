import { describe, expect, it } from 'vitest';
import { fuzzReader } from '../support/fuzz-reader';
import { foreignSeeds, hdf5Seeds, recordSeeds, textSeeds } from './support/fuzz-seeds';

const seeds = {
  ...(await foreignSeeds()),
  hdf5: await hdf5Seeds(),
  records: recordSeeds(),
  text: textSeeds(),
};

/** `npm run validate` goes on with many thousands. */
describe('damaged files', () => {
  it.each(Object.entries(seeds))(
    '%s: are read or refused, in bounded time and memory',
    async (name, files) => {
      // Records are searched for at every inspection, which takes its time.
      const cases = name === 'records' ? 40 : name === 'hdf5' ? 100 : 300;
      const report = await fuzzReader(files, { cases, seed: 7 });
      const refused = Object.values(report.problems).reduce((sum, count) => sum + count, 0);
      expect(report.read + refused).toBe(cases);
      // The damage is real: most of what describes itself does not survive it.
      if (name !== 'records') expect(refused).toBeGreaterThan(cases / 3);
    },
  );
});
