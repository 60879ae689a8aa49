import { readdir, readFile, stat } from 'node:fs/promises';
import { fileURLToPath } from 'node:url';
import type { KernelName } from './kernels';

/** Compiled kernels from the folder they are built into; null when they were not built. Throws where they are out of date. */
export async function compileKernels(name: KernelName): Promise<WebAssembly.Module | null> {
  const path = fileURLToPath(new URL(`../kernels/wasm/build/${name}.wasm`, import.meta.url));
  try {
    const bytes = await readFile(path);
    await assertFresh(path);
    return await WebAssembly.compile(bytes);
  } catch (thrown) {
    if (isMissing(thrown)) return null;
    throw thrown;
  }
}

/** Readable and compiled loops share addresses: modules older than their sources would count something else. */
async function assertFresh(path: string): Promise<void> {
  const folder = fileURLToPath(new URL('../kernels/wasm/', import.meta.url));
  const sources = (await readdir(folder)).filter((file) => file.endsWith('.ts'));
  const built = (await stat(path)).mtimeMs;
  const times = await Promise.all(sources.map(async (file) => (await stat(`${folder}${file}`)).mtimeMs));
  if (times.some((time) => time > built)) {
    throw new Error('they are older than their sources, "npm run build:wasm" brings them up to date');
  }
}

function isMissing(thrown: unknown): boolean {
  return thrown instanceof Error && 'code' in thrown && thrown.code === 'ENOENT';
}
