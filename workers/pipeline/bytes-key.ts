import type { SourceRef } from '../../shared/contracts/engine';
import type { ReadRange } from '../../shared/contracts/reader';
import { keyOfInput, type ReadInput } from './read-input';

/** Which records were counted, whatever was counted of them. */
export interface BytesKey extends ReadInput {
  range: ReadRange;
}

export function isSameBytes(a: BytesKey, b: BytesKey): boolean {
  return isSameInput(a, b) && isSameValue(a.range, b.range);
}

/** Files without a key may change, and are never the same. */
export function isSameInput(a: ReadInput, b: ReadInput): boolean {
  const key = keyOfInput(a);
  return key !== null && key === keyOfInput(b);
}

export function isSameSource(a: SourceRef, b: SourceRef): boolean {
  return a.key !== undefined && a.key === b.key && a.size === b.size;
}

/** Deep equality of plain data and typed arrays. */
export function isSameValue(a: unknown, b: unknown): boolean {
  if (Object.is(a, b)) return true;
  if (typeof a !== 'object' || typeof b !== 'object' || a === null || b === null) return false;
  if (ArrayBuffer.isView(a) && ArrayBuffer.isView(b)) return isSameArray(a, b);
  if (Array.isArray(a) !== Array.isArray(b)) return false;
  const keysOfA = Object.keys(a);
  if (keysOfA.length !== Object.keys(b).length) return false;
  return keysOfA.every((key) => isSameValue(Reflect.get(a, key), Reflect.get(b, key)));
}

/** Detector maps are compared at every turn of a dial, so words are compared where the arrays lie on words. */
function isSameArray(a: ArrayBufferView, b: ArrayBufferView): boolean {
  if (a.byteLength !== b.byteLength) return false;
  const onWords = [a.byteLength, a.byteOffset, b.byteOffset].every((bytes) => bytes % 4 === 0);
  const valuesOfA = valuesOf(a, onWords);
  const valuesOfB = valuesOf(b, onWords);
  for (let i = 0; i < valuesOfA.length; i++) if (valuesOfA[i] !== valuesOfB[i]) return false;
  return true;
}

function valuesOf(
  { buffer, byteOffset, byteLength }: ArrayBufferView,
  onWords: boolean,
): Uint32Array | Uint8Array {
  return onWords
    ? new Uint32Array(buffer, byteOffset, byteLength / 4)
    : new Uint8Array(buffer, byteOffset, byteLength);
}
