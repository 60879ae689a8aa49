import { spawnSync } from 'node:child_process';
import { expect, it } from 'vitest';
import { resultFileSchema } from '../../shared/contracts/result';

/** The bundle that `npm run build` makes, its threads and compiled kernels beside it. */
function start(args: readonly string[]) {
  return spawnSync(process.execPath, ['dist/cli/entries/cli.js', ...args], { encoding: 'utf8' });
}

it('the built command line lists, inspects and runs', () => {
  expect(JSON.parse(start(['studies']).stdout).studies).not.toHaveLength(0);
  expect(JSON.parse(start(['inspect', 'samples/near-frames.h5']).stdout).facts.kind).toBe('frames');
  const preset = ['run', 'samples/presets/delay-near.json', '--input', 'tags=samples/near-tags.h5'];
  const done = start([...preset, '--workers', '2']);
  expect(done.status, done.stderr).toBe(0);
  const result = resultFileSchema.parse(JSON.parse(done.stdout));
  expect(result.quantities['coincidences.net']?.value).toBeGreaterThan(0);
});

it('the built command line names what is wrong', () => {
  const done = start(['inspect', 'nowhere.h5']);
  expect(done.status).toBe(2);
  expect(done.stderr).toMatch(/no such file/);
});
