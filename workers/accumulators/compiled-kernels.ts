import type { FrameWasm } from '../kernels/frame-wasm';
import type { TagWasm } from '../kernels/tag-wasm';

/** Compiled kernels at hand; where one is null the TypeScript twins serve, slower and with the same counts. */
export interface CompiledKernels {
  tags: TagWasm | null;
  frames: FrameWasm | null;
}

export const NO_COMPILED_KERNELS: CompiledKernels = { tags: null, frames: null };
