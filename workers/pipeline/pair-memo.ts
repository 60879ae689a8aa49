import type { PairsKept } from '../../shared/contracts/engine';
import type { TagSpec, TagTally } from '../../shared/contracts/tally';
import type { PairCache } from '../accumulators/pair-cache';
import { type BytesKey, isSameBytes } from './bytes-key';
import { SEARCH_RECORDS } from './chunks';

interface Entry {
  key: BytesKey;
  cache: PairCache;
  /** The same pairs, those of the records alone in which the delay is looked for. */
  first: PairCache | null;
}

/**
 * Pairs kept of the last acquisitions, within one budget; the oldest go first. Tallies are counted from them again
 * without a byte read.
 */
export class PairMemo {
  /** 0: nothing is kept. */
  readonly limitBytes: number;
  #entries: Entry[] = [];
  #refusals: { key: BytesKey; why: string }[] = [];

  constructor(limitBytes: number) {
    this.limitBytes = limitBytes;
  }

  /** The tally that counting the bytes would give; null when no kept pairs tell. */
  recount(key: BytesKey, spec: TagSpec): TagTally | null {
    for (const entry of this.#entries) {
      const tally = cacheFor(entry, key)?.recount(spec) ?? null;
      if (tally === null) continue;
      this.#entries = [...this.#entries.filter((other) => other !== entry), entry];
      return tally;
    }
    return null;
  }

  keep(key: BytesKey, cache: PairCache, first: PairCache | null = null): void {
    this.#entries = this.#entries.filter(
      (entry) => !isSameBytes(entry.key, key) || !cache.replaces(entry.cache),
    );
    this.makeRoom(cache.bytes);
    this.#entries.push({ key, cache, first });
    this.#refusals = this.#refusals.filter((entry) => !isSameBytes(entry.key, key));
  }

  refuse(key: BytesKey, why: string): void {
    this.#refusals = [...this.#refusals.filter((entry) => !isSameBytes(entry.key, key)), { key, why }].slice(
      -16,
    );
  }

  /** Lets the oldest pairs go until `bytes` more fit. */
  makeRoom(bytes: number): void {
    let held = this.#entries.reduce((sum, { cache }) => sum + cache.bytes, bytes);
    while (held > this.limitBytes && this.#entries.length > 0) held -= this.#entries.shift()!.cache.bytes;
  }

  /** Whether windows of this acquisition are answered from pairs. */
  status(key: BytesKey): PairsKept {
    const cache = this.#entries.findLast((entry) => isSameBytes(entry.key, key))?.cache;
    if (cache !== undefined) return { kept: cache.pairs, bytes: cache.bytes };
    const refusal = this.#refusals.find((entry) => isSameBytes(entry.key, key));
    if (refusal !== undefined) return { kept: null, why: refusal.why };
    const why =
      'Its pairs gave way to those of acquisitions opened later; a run that reads it keeps them again.';
    return { kept: null, why: this.limitBytes > 0 ? why : 'Keeping pairs is switched off.' };
  }
}

function cacheFor({ key, cache, first }: Entry, wanted: BytesKey): PairCache | null {
  if (isSameBytes(key, wanted)) return cache;
  return isSameBytes({ ...key, range: { start: 0, end: SEARCH_RECORDS } }, wanted) ? first : null;
}
