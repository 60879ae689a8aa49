import type { FrameShape } from './frame-maps';
import { CompiledFrameMaps } from './frame-maps-wasm';
import type { FrameWasm } from './frame-wasm';

interface Loan {
  key: string;
  maps: CompiledFrameMaps;
  /** Null: nobody uses them. */
  handBack: (() => void) | null;
}

/** One set of arrays a module: they are large, and a worker counts one range at a time. */
const loans = new WeakMap<FrameWasm, Loan>();

/**
 * The module's frame maps, empty. Whoever had them is asked by its `handBack` to close and drain them first, and must
 * then forget them.
 */
export function borrowFrameMaps(wasm: FrameWasm, shape: FrameShape, handBack: () => void): CompiledFrameMaps {
  const before = loans.get(wasm);
  before?.handBack?.();
  const key = [
    shape.width,
    shape.height,
    shape.offset,
    shape.threshold,
    shape.normalised,
    shape.masked,
  ].join();
  let maps = before?.maps;
  if (maps === undefined || before?.key !== key) {
    maps?.dispose();
    maps = new CompiledFrameMaps(wasm, shape);
  }
  maps.pause();
  loans.set(wasm, { key, maps, handBack });
  return maps;
}

/** To be called by a borrower that has closed and drained the maps of its own accord. */
export function returnFrameMaps(wasm: FrameWasm): void {
  const loan = loans.get(wasm);
  if (loan !== undefined) loan.handBack = null;
}
