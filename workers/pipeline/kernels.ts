import { type CompiledKernels, NO_COMPILED_KERNELS } from '../accumulators/compiled-kernels';
import type { FrameExports } from '../kernels/frame-wasm';
import type { TagExports } from '../kernels/tag-wasm';
import { instantiateWasm } from '../kernels/wasm-module';

/** Modules of compiled kernels, one file each in `workers/kernels/wasm`. */
export type KernelName = 'tags' | 'frames';

/** How a platform gets a compiled module; null where it has none and the TypeScript twins serve. */
export type CompileKernels = (name: KernelName) => Promise<WebAssembly.Module | null>;

/** Each worker has its own instances, and so its own memory. */
export async function loadKernels(compile: CompileKernels): Promise<CompiledKernels> {
  if (typeof WebAssembly !== 'object') return NO_COMPILED_KERNELS;
  const [tags, frames] = await Promise.all([compile('tags'), compile('frames')]);
  return {
    tags: tags && (await instantiateWasm<TagExports>(tags)),
    frames: frames && (await instantiateWasm<FrameExports>(frames)),
  };
}
