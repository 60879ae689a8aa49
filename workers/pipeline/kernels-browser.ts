import framesUrl from '../kernels/wasm/build/frames.wasm?url';
import tagsUrl from '../kernels/wasm/build/tags.wasm?url';
import type { KernelName } from './kernels';

const urls: Record<KernelName, string> = { tags: tagsUrl, frames: framesUrl };

/** Compiled kernels beside the worker's script. */
export async function compileKernels(name: KernelName): Promise<WebAssembly.Module | null> {
  return WebAssembly.compileStreaming(fetch(urls[name]));
}
