import type { WasmModule } from './wasm-module';

/** What `wasm/frames.ts` exports; addresses and counts are numbers. */
export interface FrameExports {
  sumDoubles(at: number, n: number): number;
}

export type FrameWasm = WasmModule<FrameExports>;
