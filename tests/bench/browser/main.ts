import { spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync, statSync } from 'node:fs';
import { join } from 'node:path';
import type { Preset } from '../../../shared/contracts/preset';
import { startBuiltServer } from '../../e2e/support/server';
import type { BenchSettings } from '../measure';
import { longRecords, samplePreset } from '../presets';
import { describeGoal, type Held, judge, type ReportRow } from '../report';
import { median } from '../statistics';
import { benchFolder, rootFolder } from '../tools';
import { readBare } from './bare-reading';
import { cancelRun, type Drop, dropFile, withVisit } from './drop';

interface LongFile {
  what: string;
  path: string;
  preset: Preset;
}

/**
 * The file-drop path of the built page in headless Chromium, on long files of records and of frames. Rows are told as they
 * are found: what fails later does not take them along.
 */
export async function measureBrowser(
  settings: BenchSettings,
  add: (rows: ReportRow[]) => void,
): Promise<void> {
  const isQuick = settings.passes <= 3;
  if (!existsSync(join(rootFolder, 'dist/server/main.js'))) {
    const built = spawnSync('npm', ['run', '--silent', 'build'], { cwd: rootFolder, stdio: 'inherit' });
    if (built.status !== 0) throw new Error('The page could not be built.');
  }
  const folder = mkdtempSync(join(settings.folder, 'browser-'));
  const server = await startBuiltServer();
  try {
    const make = (...args: string[]): void => {
      const { status } = spawnSync(settings.python, [`${benchFolder}/numpy/make_data.py`, ...args], {
        stdio: 'inherit',
      });
      if (status !== 0) throw new Error('A long file could not be made.');
    };
    make('long_records', folder, String(isQuick ? 64_000_000 : 512_000_000), 'near');
    make('long_frames', folder, String(isQuick ? 2048 : 16384));
    const records = {
      what: 'records',
      path: join(folder, 'near.bin'),
      preset: samplePreset('joint-map-near.json', longRecords),
    };
    const frames = {
      what: 'frames',
      path: join(folder, 'frames.h5'),
      preset: samplePreset('joint-map-frames.json', null),
    };
    const rounds = isQuick ? 1 : 3;
    add(await measureSharing(server.url, records, rounds));
    for (const file of [records, frames]) {
      add(await measureDrop(server.url, file));
      add(await measureCancel(server.url, file));
    }
  } finally {
    await server.close();
    rmSync(folder, { recursive: true, force: true });
  }
}

/** Bare reading, one worker and two, one after the other, each in a browser of its own. */
async function measureSharing(
  url: string,
  { what, path, preset }: LongFile,
  rounds: number,
): Promise<ReportRow[]> {
  const gigabytes = statSync(path).size / 1e9;
  const seconds = { bare: [] as number[], one: [] as number[], two: [] as number[] };
  const counted = (workers: number): Promise<Drop> =>
    withVisit(url, workers, (visit) => dropFile(visit, preset, path, false));
  for (let round = 0; round < rounds; round++) {
    console.error(`${what}: round ${round + 1} of ${rounds}`);
    seconds.bare.push(await withVisit(url, 1, (visit) => readBare(visit, path)));
    seconds.one.push((await counted(1)).countedSeconds);
    seconds.two.push((await counted(2)).countedSeconds);
  }
  const bare = median(seconds.bare);
  const one = median(seconds.one);
  const two = median(seconds.two);
  const size = `${gigabytes.toFixed(1)} GB of ${what}`;
  return [
    plainRow(`Chromium, bare reading, ${size}`, gigabytes / bare, 'GB/s'),
    heldRow(`Chromium, read + decode + scan over bare reading, ${size}`, 'x bare reading', {
      figure: bare / one,
      goal: 0.95,
      least: 0.7,
      label: 'x bare reading',
    }),
    heldRow(`Chromium, two workers over one, ${size}`, 'x one worker', {
      figure: one / two,
      goal: 1.25,
      least: 1.1,
      label: 'x one worker',
    }),
  ];
}

const WORKERS = 2;

/** One whole run. */
async function measureDrop(url: string, { what, path, preset }: LongFile): Promise<ReportRow[]> {
  console.error(`${what}: whole run`);
  const drop = await withVisit(url, WORKERS, (visit) => dropFile(visit, preset, path, true));
  const size = `${(statSync(path).size / 1e9).toFixed(1)} GB of ${what}`;
  const first = {
    figure: drop.firstMapSeconds,
    goal: 1,
    least: 1.5,
    label: 's at most',
    smaller: true,
  };
  return [
    { ...heldRow(`Chromium, file drop to first map, ${size}`, 's', first), peakMB: drop.peakMB },
    plainRow(`Chromium, file drop to counts, ${size}`, drop.countedSeconds, 's'),
    plainRow(`Chromium, file drop to the end, fingerprint included, ${size}`, drop.doneSeconds, 's'),
    plainRow(`Chromium, longest task on the page's thread, ${size}`, drop.longestTaskMs, 'ms'),
  ];
}
async function measureCancel(url: string, { what, path, preset }: LongFile): Promise<ReportRow[]> {
  console.error(`${what}: cancel`);
  const cancel = await withVisit(url, WORKERS, (visit) => cancelRun(visit, preset, path));
  const size = `${(statSync(path).size / 1e9).toFixed(1)} GB of ${what}`;
  return [
    plainRow(`Chromium, cancel until said, ${size}`, cancel.saidMs, 'ms'),
    ...(cancel.restMs === null
      ? []
      : [plainRow(`Chromium, cancel until the workers rest, ${size}`, cancel.restMs, 'ms')]),
  ];
}

function plainRow(kernel: string, rate: number, unit: string): ReportRow {
  return {
    kernel,
    rate,
    unit,
    ratioNumpy: null,
    ratioCpp: null,
    peakMB: null,
    growth: null,
    goal: '',
    met: null,
  };
}

function heldRow(kernel: string, unit: string, held: Held): ReportRow {
  return { ...plainRow(kernel, held.figure, unit), goal: describeGoal([held]), met: judge([held]) };
}
