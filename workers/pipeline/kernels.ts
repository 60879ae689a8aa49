import { type CompiledKernels, NO_COMPILED_KERNELS } from '../accumulators/compiled-kernels';
import type { FrameExports } from '../kernels/frame-wasm';
import type { TagExports } from '../kernels/tag-wasm';
import { instantiateWasm, type WasmModule } from '../kernels/wasm-module';

/** Modules of compiled kernels, one file each in `workers/kernels/wasm`. */
export type KernelName = 'tags' | 'frames';

/** How a platform gets a compiled module; null where it has none and the TypeScript twins serve. */
export type CompileKernels = (name: KernelName) => Promise<WebAssembly.Module | null>;

/** Each worker has its own instances, and so its own memory. */
export async function loadKernels(compile: CompileKernels): Promise<CompiledKernels> {
  if (typeof WebAssembly !== 'object') return NO_COMPILED_KERNELS;
  const [tags, frames] = await Promise.all([
    load<TagExports>(compile, 'tags'),
    load<FrameExports>(compile, 'frames'),
  ]);
  return { tags, frames };
}

async function load<Exports extends object>(
  compile: CompileKernels,
  name: KernelName,
): Promise<WasmModule<Exports> | null> {
  try {
    const compiled = await compile(name);
    if (compiled !== null) return await instantiateWasm<Exports>(compiled);
    tell(name, 'they were not built, "npm run build:wasm" does');
  } catch (thrown) {
    // A machine without SIMD, a policy that forbids compiling, a file that did not arrive: the twins count the same.
    tell(name, thrown instanceof Error ? thrown.message : String(thrown));
  }
  return null;
}

function tell(name: KernelName, why: string): void {
  console.warn(`Counting goes on without the compiled kernels of ${name}, several times slower: ${why}.`);
}
