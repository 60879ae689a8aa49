import { readFile } from 'node:fs/promises';

export interface Kernel {
  /** Works on the first `items` items. */
  work(items: number): void | Promise<void>;
  /** Numbers of the last work that every contender must agree on. */
  answer(): Float64Array<ArrayBuffer> | Promise<Float64Array<ArrayBuffer>>;
}

/** Loads the data of a row, made by tests/bench/numpy/make_data.py. */
export type OpenKernel = (folder: string, args: readonly string[]) => Promise<Kernel>;

export async function loadBytes(folder: string, name: string): Promise<Uint8Array<ArrayBuffer>> {
  const { buffer, byteOffset, length } = await readFile(`${folder}/${name}`);
  if (!(buffer instanceof ArrayBuffer)) throw new Error(`${name} was read into shared memory.`);
  return new Uint8Array(buffer, byteOffset, length);
}

export async function loadU16(folder: string, name: string): Promise<Uint16Array<ArrayBuffer>> {
  const { buffer, byteOffset, length } = await loadBytes(folder, name);
  return new Uint16Array(buffer, byteOffset, length / 2);
}

/** 64-bit ticks as doubles: all below 2^53 here. */
export async function loadTicks(folder: string, name: string): Promise<Float64Array<ArrayBuffer>> {
  const { buffer, byteOffset, length } = await loadBytes(folder, name);
  return Float64Array.from(new BigInt64Array(buffer, byteOffset, length / 8), Number);
}
