import type { FrameMaps, FrameShape } from './frame-maps';
import { CompiledFrameMaps } from './frame-maps-wasm';
import type { FrameWasm } from './frame-wasm';
import { CompiledJoint, type JointDistribution } from './joint-distribution';

/** Maps, and the joint distribution of a region where one is wanted. */
export interface FrameKernels {
  maps: FrameMaps;
  joint: JointDistribution | null;
}

interface Loan {
  key: string;
  maps: CompiledFrameMaps;
  joint: CompiledJoint | null;
  /** Null: nobody uses them. */
  handBack: (() => void) | null;
}

/** One set of arrays a module: they are large, and a worker counts one range at a time. */
const loans = new WeakMap<FrameWasm, Loan>();

/**
 * The module's kernels for such frames, empty. Whoever had them is asked by its `handBack` to close and drain them first,
 * and must then forget them. `jointPixels`: how many pixels the region of the joint distribution has, 0 for none.
 */
export function borrowFrameKernels(
  wasm: FrameWasm,
  shape: FrameShape,
  jointPixels: number,
  handBack: () => void,
): FrameKernels {
  const before = loans.get(wasm);
  before?.handBack?.();
  const key = [
    shape.width,
    shape.height,
    shape.offset,
    shape.threshold,
    shape.normalised,
    jointPixels,
    shape.masked,
  ].join();
  let maps = before?.maps;
  let joint = before?.joint ?? null;
  if (maps === undefined || before?.key !== key) {
    // What lies behind the maps goes with them.
    maps?.dispose();
    maps = new CompiledFrameMaps(wasm, shape);
    joint = jointPixels > 0 ? new CompiledJoint(wasm, jointPixels) : null;
  }
  maps.pause();
  joint?.pause();
  loans.set(wasm, { key, maps, joint, handBack });
  return { maps, joint };
}

/** To be called by a borrower that has closed and drained the kernels of its own accord. */
export function returnFrameKernels(wasm: FrameWasm): void {
  const loan = loans.get(wasm);
  if (loan !== undefined) loan.handBack = null;
}
