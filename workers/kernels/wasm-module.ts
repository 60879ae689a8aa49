/**
 * A compiled kernel module and its own memory. Kernels take byte addresses; arrays are placed by `place`, which hands
 * out 16-byte-aligned room and never takes it back (an accumulator or reader places its arrays once). Growing the memory
 * detaches every view made before, so views are made anew after `place` (`f64`, `i32` ...), which costs nothing.
 */
export class WasmModule<Exports extends object> {
  readonly memory: WebAssembly.Memory;
  readonly call: Exports;
  /** Below this the module keeps its own constants. */
  #next = 65536;

  constructor(memory: WebAssembly.Memory, call: Exports) {
    this.memory = memory;
    this.call = call;
  }

  /** Room for `bytes` bytes; its content is zero unless `release` has given it back before.
   * Throws a RangeError where the machine has no more. */
  place(bytes: number): number {
    const at = this.#next;
    this.#next = Math.ceil((at + bytes) / 16) * 16;
    const missing = this.#next - this.memory.buffer.byteLength;
    if (missing > 0) this.memory.grow(Math.ceil(missing / 65536));
    return at;
  }

  /** Where the next `place` would begin: to be handed to `release`. */
  get mark(): number {
    return this.#next;
  }

  /** Takes back everything placed since `mark` was read. What was there is not erased. */
  release(mark: number): void {
    this.#next = mark;
  }

  f64(at: number, length: number): Float64Array {
    return new Float64Array(this.memory.buffer, at, length);
  }
  f32(at: number, length: number): Float32Array {
    return new Float32Array(this.memory.buffer, at, length);
  }
  i32(at: number, length: number): Int32Array {
    return new Int32Array(this.memory.buffer, at, length);
  }
  u32(at: number, length: number): Uint32Array {
    return new Uint32Array(this.memory.buffer, at, length);
  }
  u16(at: number, length: number): Uint16Array {
    return new Uint16Array(this.memory.buffer, at, length);
  }
  u8(at: number, length: number): Uint8Array {
    return new Uint8Array(this.memory.buffer, at, length);
  }
}

/** Instantiates a module whose functions are those of `Exports` (the caller's word for what the source exports). */
export async function instantiateWasm<Exports extends object>(
  compiled: WebAssembly.Module,
): Promise<WasmModule<Exports>> {
  const memory = new WebAssembly.Memory({ initial: 2, maximum: 65536 });
  const instance = await WebAssembly.instantiate(compiled, { env: { memory, abort: stop } });
  return new WasmModule<Exports>(memory, instance.exports as Exports);
}

function stop(): never {
  throw new Error('A kernel was stopped by its own check.');
}
