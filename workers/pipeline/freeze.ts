import { Problem } from '../../shared/errors/problem';
import type { z } from '../../shared/util/zod';

/**
 * Plain data with typed arrays, big integers and numbers that JSON has no word for, as JSON beside a list of arrays.
 * Each such value is an object of one key: {"$array": index}, {"$whole": "123"}, {"$real": "-Infinity"}.
 */
const arrayTypes = {
  f64: Float64Array,
  f32: Float32Array,
  i32: Int32Array,
  u32: Uint32Array,
  i16: Int16Array,
  u16: Uint16Array,
  i8: Int8Array,
  u8: Uint8Array,
} as const;
export type ArrayType = keyof typeof arrayTypes;
export type FrozenArray =
  | Float64Array
  | Float32Array
  | Int32Array
  | Uint32Array
  | Int16Array
  | Uint16Array
  | Int8Array
  | Uint8Array;
export const arrayTypeNames = Object.keys(arrayTypes) as [ArrayType, ...ArrayType[]];

/** No part nests deeper; a file that does is refused before the stack is. */
const DEEPEST = 16;

export type Frozen = z.core.util.JSONType;

export function freeze(value: unknown, arrays: FrozenArray[]): Frozen {
  if (typeof value === 'bigint') return { $whole: value.toString() };
  if (typeof value === 'number') return Number.isFinite(value) ? value : { $real: String(value) };
  if (value === null || typeof value === 'string' || typeof value === 'boolean') return value;
  if (ArrayBuffer.isView(value)) return { $array: arrays.push(arrayOf(value)) - 1 };
  if (Array.isArray(value)) return value.map((inner) => freeze(inner, arrays));
  if (typeof value === 'object') {
    const entries = Object.entries(value).filter(([, inner]) => inner !== undefined);
    return Object.fromEntries(entries.map(([key, inner]) => [key, freeze(inner, arrays)]));
  }
  throw new TypeError(`A part cannot hold a ${typeof value}.`);
}

/** @throws Problem `unreadable` for what `freeze` would not have written. */
export function thaw(frozen: Frozen, arrays: readonly FrozenArray[], depth = 0): unknown {
  if (depth > DEEPEST) throw broken('nests too deeply');
  if (typeof frozen !== 'object' || frozen === null) return frozen;
  if (Array.isArray(frozen)) return frozen.map((inner) => thaw(inner, arrays, depth + 1));
  const entries = Object.entries(frozen);
  const [key, only] = entries[0] ?? ['', null];
  if (!key.startsWith('$')) {
    return Object.fromEntries(entries.map(([name, inner]) => [name, thaw(inner, arrays, depth + 1)]));
  }
  if (key === '$array' && typeof only === 'number') {
    const array = arrays[only];
    if (array !== undefined) return array;
  }
  // 40 digits hold any tick of any run; longer text only costs time.
  if (key === '$whole' && typeof only === 'string' && /^-?\d{1,40}$/.test(only)) return BigInt(only);
  if (key === '$real' && typeof only === 'string' && /^(NaN|-?Infinity)$/.test(only)) return Number(only);
  throw broken(`holds "${key}" with no value that fits`);
}

export function typeOfArray(array: FrozenArray): ArrayType {
  const found = arrayTypeNames.find((name) => array instanceof arrayTypes[name]);
  if (found === undefined) throw new TypeError(`A part cannot hold a ${array.constructor.name}.`);
  return found;
}

export function bytesPerElement(type: ArrayType): number {
  return arrayTypes[type].BYTES_PER_ELEMENT;
}

/** Over the whole of `buffer`, which holds `length` elements. */
export function arrayOver(type: ArrayType, buffer: ArrayBuffer, length: number): FrozenArray {
  return new arrayTypes[type](buffer, 0, length);
}

function arrayOf(view: ArrayBufferView): FrozenArray {
  const type = Object.values(arrayTypes).find((each) => view instanceof each);
  if (type !== undefined) return view as FrozenArray;
  throw new TypeError(`A part cannot hold a ${view.constructor.name}.`);
}

function broken(what: string): Problem {
  return new Problem('unreadable', `The head of the part ${what}; count this shard again.`);
}
