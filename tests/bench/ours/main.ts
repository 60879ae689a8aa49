import { writeFile } from 'node:fs/promises';
import { Session } from 'node:inspector/promises';
import { createInterface } from 'node:readline';
import type { OpenKernel } from './adapter';
import { bootstrap } from './bootstrap';
import { decode } from './decode';
import { frames } from './frames';
import { joint } from './joint';
import { heralded, histogram, matrixLists } from './lists';
import { matrixMerged } from './merged';

/** Our kernels as a contender: the same lines as tests/bench/numpy/serve.py. One adapter a row, so that a kernel is
 * changed for another in one place. */
const adapters: Record<string, OpenKernel> = {
  bootstrap,
  decode,
  frames,
  heralded,
  histogram,
  joint,
  'matrix-lists': matrixLists,
  'matrix-merged': matrixMerged,
};

const [name = '', folder = '', ...args] = process.argv.slice(2);
const open = adapters[name];
if (open === undefined) throw new Error(`No kernel is named ${name}; there are ${Object.keys(adapters)}.`);
const kernel = await open(folder, args);

function say(facts: object): void {
  process.stdout.write(`${JSON.stringify(facts)}\n`);
}

/** Follows the passes asked for from here on, loading left out; a file named by the environment gets the profile. */
const profilePath = process.env.BENCH_PROFILE;
const session = new Session();
if (profilePath !== undefined) {
  session.connect();
  await session.post('Profiler.enable');
  await session.post('Profiler.start');
}

say({ ready: true });
for await (const line of createInterface({ input: process.stdin })) {
  const [verb, value = ''] = line.split(' ');
  if (verb === 'pass') {
    const start = performance.now();
    const before = process.cpuUsage();
    await kernel.work(Number(value));
    const { user, system } = process.cpuUsage(before);
    say({ cpu: (user + system) / 1e6, wall: (performance.now() - start) / 1e3 });
  } else {
    await writeFile(value, Buffer.from((await kernel.answer()).buffer));
    say({ done: true });
  }
}

if (profilePath !== undefined) {
  const { profile } = await session.post('Profiler.stop');
  await writeFile(profilePath, JSON.stringify(profile));
}
