import { describe, expect, it } from 'vitest';
import { foreignSeeds, hdf5Seeds, recordSeeds, textSeeds } from '../formats/support/fuzz-seeds';
import { fuzzReader } from '../support/fuzz-reader';

const cases = Number(process.env.GEMEL_FUZZ_CASES ?? 20_000);
const seed = Number(process.env.GEMEL_FUZZ_SEED ?? 11);
const seeds = {
  ...(await foreignSeeds()),
  hdf5: await hdf5Seeds(),
  records: recordSeeds(),
  text: textSeeds(),
};

describe(`${cases} damaged files of each kind`, () => {
  it.each(Object.entries(seeds))(
    '%s: are read or refused, in bounded time and memory',
    async (name, files) => {
      const report = await fuzzReader(files, { cases, seed });
      console.log(
        `${name}: ${report.cases} cases, ${report.read} read, refused ${JSON.stringify(report.problems)}, slowest ${report.slowestSeconds.toFixed(2)} s of CPU, largest ${(report.largestBytes / 2 ** 20).toFixed(0)} MiB`,
      );
      expect(report.cases).toBe(cases);
    },
  );
});
