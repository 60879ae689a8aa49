import type { WasmModule } from './wasm-module';

/** What `wasm/tags.ts` exports; addresses and counts are numbers. */
export interface TagExports {
  sumDoubles(at: number, n: number): number;
}

export type TagWasm = WasmModule<TagExports>;
