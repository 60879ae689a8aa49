/**
 * Where decoding stands. Time of a record = offsetTick + epochTick + its time field; a block's base is
 * offsetTick + baseHigh * 2^32, so that differences stay exact in doubles (below 2^53).
 */
export interface DecodeState {
  /** Next record of the chunk, by index into the words. */
  next: number;
  /** Tags written so far to the output columns. */
  count: number;
  /** Rollovers up to the last re-base. */
  offsetTick: bigint;
  /** Rollovers since then; whole, at most `maxEpochTick`. */
  epochTick: number;
  /** High word taken out of 53..64-bit time fields; 0 for shorter ones. */
  baseHigh: number;
  /** Time field of the last record that counts, for finding wraps; high -1 when there is none. */
  previousHigh: number;
  previousLow: number;
}

export interface TagColumns {
  deltaTick: Float64Array;
  channel: Uint16Array;
}

/**
 * Decodes from `state.next` on. Stops at the end of the words, or before the record that asks for a new base; the
 * caller then closes the block, re-bases and calls again.
 */
export type Decode = (words: Uint32Array, state: DecodeState, out: TagColumns) => void;

/**
 * 2^52: with a time field of at most 52 bits, epoch + field stays below 2^53. The general decoder takes the same limit
 * for its epoch and bounds the rest to 2^52 - 2^32 by `maxHighSpan`.
 */
export const maxEpochTick = 2 ** 52;
export const maxHighSpan = 2 ** 20 - 2;

export function createDecodeState(offsetTick: bigint): DecodeState {
  return { next: 0, count: 0, offsetTick, epochTick: 0, baseHigh: 0, previousHigh: -1, previousLow: 0 };
}

export function baseTickOf(state: DecodeState): bigint {
  return state.offsetTick + (BigInt(state.baseHigh) << 32n);
}
