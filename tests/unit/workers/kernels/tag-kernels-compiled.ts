import type { TagWasm } from '../../../../workers/kernels/tag-wasm';
import { loadKernels } from '../../../../workers/pipeline/kernels';
import { compileKernels } from '../../../../workers/pipeline/kernels-node';

/** A compiled module of its own; the tests need `npm run build:wasm`. */
export async function tagKernels(): Promise<TagWasm> {
  const { tags } = await loadKernels(compileKernels);
  if (tags === null) throw new Error('The compiled kernels are missing; run "npm run build:wasm".');
  return tags;
}
