import { readFile } from 'node:fs/promises';
import { fileURLToPath } from 'node:url';
import type { KernelName } from './kernels';

/** Compiled kernels from the folder they are built into; null when they were not built. */
export async function compileKernels(name: KernelName): Promise<WebAssembly.Module | null> {
  const path = fileURLToPath(new URL(`../kernels/wasm/build/${name}.wasm`, import.meta.url));
  try {
    return await WebAssembly.compile(await readFile(path));
  } catch (thrown) {
    if (thrown instanceof Error && 'code' in thrown && thrown.code === 'ENOENT') return null;
    throw thrown;
  }
}
