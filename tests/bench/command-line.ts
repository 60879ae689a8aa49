import { spawn, spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { resultFileSchema } from '../../shared/contracts/result';
import type { BenchSettings } from './measure';
import { longRecords, samplePreset } from './presets';
import { watchMemory } from './process-tree';
import { describeGoal, judge, type ReportRow } from './report';
import { median } from './statistics';
import { benchFolder, rootFolder } from './tools';

const RECORDS = 48_000_000;
const mark = { goal: 1.8, least: 1.5, label: 'x one worker' };

/** The whole witness preset on two long files, by the command line with one worker and with two. */
export async function measureCommandLine(settings: BenchSettings): Promise<ReportRow> {
  const folder = mkdtempSync(join(settings.folder, 'command-line-'));
  try {
    const records = String(Math.round(RECORDS * settings.share));
    for (const plane of ['near', 'far']) {
      const args = [`${benchFolder}/numpy/make_data.py`, 'long_records', folder, records, plane];
      if (spawnSync(settings.python, args, { stdio: 'inherit' }).status !== 0)
        throw new Error('The files of the command line could not be made.');
    }
    const preset = join(folder, 'preset.json');
    writeFileSync(preset, JSON.stringify(samplePreset('witness-tags.json', longRecords)));
    const runs: Record<1 | 2, Run[]> = { 1: [], 2: [] };
    const rounds = settings.passes > 3 ? 3 : 1;
    for (let round = 0; round < rounds; round++) {
      for (const workers of [1, 2] as const) runs[workers].push(await runOnce(folder, preset, workers));
    }
    const [first] = runs[1];
    for (const run of [...runs[1], ...runs[2]]) {
      if (run.answer !== first?.answer) throw new Error('Two workers find other numbers than one.');
    }
    const secondsOf = (workers: 1 | 2): number => median(runs[workers].map(({ seconds }) => seconds));
    const figure = secondsOf(1) / secondsOf(2);
    return {
      kernel: 'command line, witness preset, two workers over one',
      rate: figure,
      unit: 'x one worker',
      ratioNumpy: null,
      ratioCpp: null,
      peakMB: runs[2].reduce<number | null>(
        (most, { peakMB }) => (peakMB === null ? most : Math.max(most ?? 0, peakMB)),
        null,
      ),
      growth: null,
      goal: describeGoal([mark]),
      met: judge([{ ...mark, figure }]),
    };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

interface Run {
  seconds: number;
  peakMB: number | null;
  /** All quantities, to be compared bit by bit. */
  answer: string;
}

async function runOnce(folder: string, preset: string, workers: number): Promise<Run> {
  const out = join(folder, 'result.json');
  const args = ['run', preset, '--workers', String(workers), '--seed', '7', '--out', out];
  for (const plane of ['near', 'far']) args.push('--input', `${plane}=${join(folder, `${plane}.bin`)}`);
  const start = performance.now();
  const child = spawn('npm', ['run', '--silent', 'gemel', '--', ...args], {
    cwd: rootFolder,
    stdio: ['ignore', 'ignore', 'pipe'],
  });
  let said = '';
  child.stderr.on('data', (chunk: Buffer) => {
    said += chunk.toString();
  });
  const memory = watchMemory(child.pid ?? 0, () => true);
  const code = await new Promise<number | null>((resolve) => child.once('close', resolve));
  const seconds = (performance.now() - start) / 1000;
  const peakMB = memory.stop();
  // 3: the run is whole and one of its checks failed, which is no matter of speed.
  if (code !== 0 && code !== 3) throw new Error(`The command line ended with ${code}: ${said}`);
  const result = resultFileSchema.parse(JSON.parse(readFileSync(out, 'utf8')));
  return { seconds, peakMB, answer: JSON.stringify(result.quantities) };
}
