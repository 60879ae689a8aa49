import { createHash } from 'node:crypto';
import { mkdir, readFile, rm, writeFile } from 'node:fs/promises';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { type SimulatedFile, simulateToFile } from '../../workers/entries/node-writers';
import { createRecordPacker } from '../../workers/simulate/records';
import { acquisitions } from './acquisitions';
import { TICK_FS } from './bench';
import { withFixedClock } from './fixed-clock';
import { largeRuns } from './large';
import { samplePresets } from './presets';

const usage =
  'npm run samples [-- --out FOLDER] | npm run samples -- --large [--megabytes 400] [--only near-tags.bin] [--out FOLDER]';
const samplesFolder = fileURLToPath(new URL('..', import.meta.url));
const say = (text: string): void => void process.stderr.write(`${text}\n`);

const scenario =
  'The Lanternfield pair bench, an invented set-up: a 405 nm pump of 75 µm waist in 5 mm of crystal, pairs at 810 nm, two 16 × 16 single-photon arrays, a bucket detector behind a lantern stencil, and a camera. Everything is simulated from known numbers.';

async function writeSamples(folder: string): Promise<void> {
  await mkdir(`${folder}/presets`, { recursive: true });
  await mkdir(`${folder}/scenarios`, { recursive: true });
  const files = [];
  for (const { file, scenarioFile, scenario: run, shows } of acquisitions) {
    await writeJson(`${folder}/scenarios/${scenarioFile}`, run);
    const written = await withFixedClock(() => simulateToFile(run, `${folder}/${file}`, say, () => false));
    report(written);
    const bytes = await readFile(written.file);
    const sha256 = createHash('sha256').update(bytes).digest('hex');
    files.push({ file, bytes: bytes.length, sha256, shows, seed: run.seed });
  }
  const presets = [];
  for (const { file, preset, files: inputs } of samplePresets(createRecordPacker(4, TICK_FS).layout)) {
    await writeJson(`${folder}/presets/${file}`, preset);
    presets.push({ preset: `presets/${file}`, files: inputs });
  }
  await writeJson(`${folder}/manifest.json`, { gemel: 1, scenario, files, presets });
}

async function writeLarge(folder: string, megabytes: number, only: string | undefined): Promise<void> {
  await mkdir(folder, { recursive: true });
  const runs = largeRuns(megabytes).filter(({ file }) => only === undefined || file === only);
  if (runs.length === 0) throw new Error(`--only names no large sample: ${only}. Usage: ${usage}`);
  for (const { file, scenario: run } of runs) {
    await rm(`${folder}/${file}`, { force: true });
    report(await simulateToFile(run, `${folder}/${file}`, say, () => false));
  }
}

function report({ file, bytes, count, kind }: SimulatedFile): void {
  say(`${file}: ${bytes} bytes, ${count} ${kind}`);
}

async function writeJson(path: string, value: unknown): Promise<void> {
  await writeFile(path, `${JSON.stringify(value, null, 2)}\n`);
}

const { values } = parseArgs({
  options: {
    large: { type: 'boolean', default: false },
    megabytes: { type: 'string', default: '400' },
    only: { type: 'string' },
    out: { type: 'string' },
  },
});
const megabytes = Number(values.megabytes);
if (!(megabytes > 0))
  throw new Error(`--megabytes takes a number above zero, found ${values.megabytes}. Usage: ${usage}`);
if (values.large) await writeLarge(values.out ?? `${samplesFolder}large`, megabytes, values.only);
else await writeSamples(values.out ?? samplesFolder.replace(/\/$/, ''));
