import type { CompiledKernels } from '../../../workers/accumulators/compiled-kernels';
import { loadKernels } from '../../../workers/pipeline/kernels';
import { compileKernels } from '../../../workers/pipeline/kernels-node';

/** A compiled module; the bench measures nothing else. */
export async function kernelsOf<Name extends keyof CompiledKernels>(
  name: Name,
): Promise<NonNullable<CompiledKernels[Name]>> {
  const kernels = await loadKernels(compileKernels);
  const found = kernels[name];
  if (found === null) throw new Error('The compiled kernels are missing; run "npm run build:wasm".');
  return found;
}
