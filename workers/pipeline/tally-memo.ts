import type { Tally, TallySpec } from '../../shared/contracts/tally';
import { type BytesKey, isSameBytes, isSameValue } from './bytes-key';
import { PairMemo } from './pair-memo';
import { keyOfInput } from './read-input';

/**
 * Counts of the last runs. Turning a dial that leaves the specification as it was then needs no byte again, nor does one
 * that asks for other windows of pairs that are kept. Only whole counts are kept, of inputs whose files have keys.
 */
export interface MemoKey extends BytesKey {
  spec: TallySpec;
}

const ENTRIES = 12;
const BYTES = 512 * 2 ** 20;

export class TallyMemo {
  readonly #entries: { key: MemoKey; tally: Tally; bytes: number }[] = [];
  readonly pairs: PairMemo;

  /** @param pairBytes how much memory pairs may take; with 0 only whole counts are kept. */
  constructor(pairBytes = 0) {
    this.pairs = new PairMemo(pairBytes);
  }

  /** Counts with just this specification, or those the kept pairs give. */
  find(key: MemoKey): Tally | null {
    const at = this.#entries.findIndex((entry) => isSameKey(entry.key, key));
    if (at < 0) return key.spec.kind === 'tags' ? this.pairs.recount(key, key.spec) : null;
    const [entry] = this.#entries.splice(at, 1);
    this.#entries.push(entry!);
    return entry!.tally;
  }

  keep(key: MemoKey, tally: Tally): void {
    if (keyOfInput(key) === null) return;
    const bytes = countBytes(tally);
    if (bytes > BYTES) return;
    this.#entries.push({ key, tally, bytes });
    let held = this.#entries.reduce((sum, entry) => sum + entry.bytes, 0);
    while (this.#entries.length > ENTRIES || held > BYTES) held -= this.#entries.shift()!.bytes;
  }
}

function isSameKey(a: MemoKey, b: MemoKey): boolean {
  return isSameBytes(a, b) && isSameAim(a.spec, b.spec) && isSameValue(a.spec, b.spec);
}

/** First what most often differs: the maps of channels are long. */
function isSameAim(a: TallySpec, b: TallySpec): boolean {
  if (a.kind === 'frames' || b.kind === 'frames') return a.kind === b.kind;
  return isSameValue(a.histogram, b.histogram) && isSameValue(a.window, b.window);
}

function countBytes(value: unknown): number {
  if (ArrayBuffer.isView(value)) return value.byteLength;
  if (typeof value !== 'object' || value === null) return 8;
  return Object.values(value).reduce<number>((sum, inner) => sum + countBytes(inner), 0);
}
