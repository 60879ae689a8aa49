import { execFile } from 'node:child_process';
import { createHash } from 'node:crypto';
import { access } from 'node:fs/promises';
import { promisify } from 'node:util';
import type { PixelArray } from '../../../shared/contracts/blocks';
import type { Tags } from './sources';

/** Debian's, whose libraries come as packages of the system. */
const python = '/usr/bin/python3';
const run = promisify(execFile);

/** Runs a script beside the tests and answers what it printed as JSON. */
export async function runPython(
  script: string,
  modules: readonly string[],
  folder: string,
): Promise<unknown> {
  return JSON.parse(await writePython(script, modules, folder));
}

/** Runs a script beside the tests. Fails, never skips, where a library is missing. */
export async function writePython(
  script: string,
  modules: readonly string[],
  folder: string,
): Promise<string> {
  try {
    await access(python);
    await run(python, ['-c', `import ${modules.join(', ')}`]);
  } catch (thrown) {
    const packages = modules.map((name) => `python3-${name.toLowerCase()}`).join(' ');
    throw new Error(
      `These tests write files by ${python} with ${modules.join(' and ')}, which is missing: apt-get install ${packages}`,
      { cause: thrown },
    );
  }
  const path = new URL(`../${script}`, import.meta.url).pathname;
  const { stdout } = await run(python, [path, folder], { maxBuffer: 2 ** 26 });
  return stdout;
}

/** Lines of "time channel", as the writers hash them. */
export function hashTags({ ticks, channels }: Tags): string {
  const hash = createHash('sha256');
  hash.update(ticks.map((tick, i) => `${tick} ${channels[i]}\n`).join(''));
  return hash.digest('hex');
}

/** Pixels as doubles, little-endian. */
export function hashPixels(pixels: readonly number[] | PixelArray): string {
  const doubles = Float64Array.from(pixels);
  return createHash('sha256').update(new Uint8Array(doubles.buffer)).digest('hex');
}
