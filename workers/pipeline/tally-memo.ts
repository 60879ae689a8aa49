import type { SourceRef } from '../../shared/contracts/engine';
import type { Layout } from '../../shared/contracts/layout';
import type { ReadRange } from '../../shared/contracts/reader';
import type { Tally, TallySpec } from '../../shared/contracts/tally';

/**
 * Counts of the last runs. Turning a dial that leaves the specification as it was then needs no byte again. Only whole
 * counts are kept, of sources that have a key.
 */
export interface MemoKey {
  source: SourceRef;
  layout: Layout;
  spec: TallySpec;
  range: ReadRange;
}

const ENTRIES = 12;
const BYTES = 512 * 2 ** 20;

export class TallyMemo {
  readonly #entries: { key: MemoKey; tally: Tally; bytes: number }[] = [];

  find(key: MemoKey): Tally | null {
    const at = this.#entries.findIndex((entry) => isSameKey(entry.key, key));
    if (at < 0) return null;
    const [entry] = this.#entries.splice(at, 1);
    this.#entries.push(entry!);
    return entry!.tally;
  }

  keep(key: MemoKey, tally: Tally): void {
    if (key.source.key === undefined) return;
    const bytes = countBytes(tally);
    if (bytes > BYTES) return;
    this.#entries.push({ key, tally, bytes });
    let held = this.#entries.reduce((sum, entry) => sum + entry.bytes, 0);
    while (this.#entries.length > ENTRIES || held > BYTES) held -= this.#entries.shift()!.bytes;
  }
}

export function isSameSource(a: SourceRef, b: SourceRef): boolean {
  return a.key !== undefined && a.key === b.key && a.size === b.size;
}

function isSameKey(a: MemoKey, b: MemoKey): boolean {
  return (
    isSameSource(a.source, b.source) &&
    isSameValue(a.range, b.range) &&
    isSameValue(a.layout, b.layout) &&
    isSameValue(a.spec, b.spec)
  );
}

/** Deep equality of plain data and typed arrays. */
function isSameValue(a: unknown, b: unknown): boolean {
  if (Object.is(a, b)) return true;
  if (typeof a !== 'object' || typeof b !== 'object' || a === null || b === null) return false;
  if (ArrayBuffer.isView(a) && ArrayBuffer.isView(b)) return isSameArray(a, b);
  if (Array.isArray(a) !== Array.isArray(b)) return false;
  const keysOfA = Object.keys(a);
  if (keysOfA.length !== Object.keys(b).length) return false;
  return keysOfA.every((key) => isSameValue(Reflect.get(a, key), Reflect.get(b, key)));
}

function isSameArray(a: ArrayBufferView, b: ArrayBufferView): boolean {
  if (a.byteLength !== b.byteLength) return false;
  const bytesOfA = new Uint8Array(a.buffer, a.byteOffset, a.byteLength);
  const bytesOfB = new Uint8Array(b.buffer, b.byteOffset, b.byteLength);
  return bytesOfA.every((byte, i) => byte === bytesOfB[i]);
}

function countBytes(value: unknown): number {
  if (ArrayBuffer.isView(value)) return value.byteLength;
  if (typeof value !== 'object' || value === null) return 8;
  return Object.values(value).reduce<number>((sum, inner) => sum + countBytes(inner), 0);
}
