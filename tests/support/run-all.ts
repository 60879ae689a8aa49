import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { ensureTools } from './tools';

/**
 * `npm test`: types, lint, build, unit and API tests, browser tests. Goes on after a failure, so that one run tells all;
 * the last line is "N passed, N failed" and the exit code says the same.
 */
interface Tally {
  passed: number;
  failed: number;
  notRun: number;
}

const total: Tally = { passed: 0, failed: 0, notRun: 0 };
const failures: string[] = [];
const scratch = mkdtempSync(join(tmpdir(), 'gemel-test-'));

function add(name: string, tally: Tally): void {
  total.passed += tally.passed;
  total.failed += tally.failed;
  total.notRun += tally.notRun;
  if (tally.failed > 0) failures.push(`${name}: ${tally.failed} failed`);
}

/** A command that passes or fails as a whole. */
function step(name: string, command: string, args: readonly string[]): boolean {
  console.log(`\n== ${name}`);
  const ok = spawnSync(command, args, { stdio: 'inherit' }).status === 0;
  add(name, { passed: ok ? 1 : 0, failed: ok ? 0 : 1, notRun: 0 });
  return ok;
}

/** A vitest run, counted test by test from its report. */
function suite(name: string, args: readonly string[]): void {
  console.log(`\n== ${name}`);
  const report = join(scratch, `${name.replaceAll(' ', '-')}.json`);
  const run = spawnSync(
    'npx',
    ['vitest', 'run', '--reporter=default', '--reporter=json', `--outputFile.json=${report}`, ...args],
    { stdio: 'inherit', env: { ...process.env, TZ: 'UTC' } },
  );
  const tally = readReport(report);
  // A file that cannot be loaded or an error outside of any test fails the run without failing a test.
  if (run.status !== 0 && tally.failed === 0) tally.failed = 1;
  add(name, tally);
}

function readReport(path: string): Tally {
  try {
    const report: unknown = JSON.parse(readFileSync(path, 'utf8'));
    if (
      typeof report === 'object' &&
      report !== null &&
      'numPassedTests' in report &&
      'numFailedTests' in report
    ) {
      return {
        passed: Number(report.numPassedTests),
        failed: Number(report.numFailedTests),
        notRun: 'numPendingTests' in report ? Number(report.numPendingTests) : 0,
      };
    }
  } catch (thrown) {
    console.error(`No report of the tests was written: ${String(thrown)}`);
  }
  return { passed: 0, failed: 1, notRun: 0 };
}

function finish(): never {
  rmSync(scratch, { recursive: true, force: true });
  console.log('');
  for (const line of failures) console.log(line);
  if (total.notRun > 0) {
    console.log(`${total.notRun} not run; the reason is printed above.`);
  }
  console.log(`${total.passed} passed, ${total.failed} failed`);
  process.exit(total.failed === 0 ? 0 : 1);
}

try {
  ensureTools();
} catch (thrown) {
  console.error(thrown instanceof Error ? thrown.message : String(thrown));
  add('tools', { passed: 0, failed: 1, notRun: 0 });
  finish();
}
for (const room of ['shared', 'workers', 'server', 'src', 'tests']) {
  step(`types: ${room}`, 'npx', ['tsc', '-p', room]);
}
step('lint', 'npx', ['biome', 'check', '.']);
// Before the tests: those of the command line start it from its bundle, seconds faster each time.
const built = step('build', 'npm', ['run', '--silent', 'build']);
suite('unit and API tests', []);
if (built) {
  suite('browser tests', ['--config', 'tests/e2e/vitest.config.ts']);
}
finish();
