import type { TagBlock } from '../../../shared/contracts/blocks';
import type {
  ByteSource,
  CancelToken,
  ReadRange,
  RecordDecoder,
  RecordDecoding,
} from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { passTurn } from '../turn';
import { openDecoder } from './compiled';
import { compileDecode } from './decode-fast';
import { rebase, timeHigh, timeLow } from './decode-general';
import {
  baseTickOf,
  createDecodeState,
  type Decode,
  type DecodeState,
  type TagColumns,
} from './decode-state';
import type { RecordPlan } from './plan';
import { type RecordSlice, readRecordBytes, readSlices } from './slices';
import { isSkipped, toRecordWords, withoutSkipped } from './words';

/** What is read, and by what. */
export interface RecordFile {
  source: ByteSource;
  plan: RecordPlan;
  decoding: RecordDecoding | undefined;
}

type Slices = AsyncIterable<RecordSlice> | Iterable<RecordSlice>;

/**
 * Blocks of the range, in file order. `tickOffset` is `scanOffset` of its start; `onEnd` hears that of its end. Memory
 * is bounded by two slices, whatever the range. `slices` are those of the range where they are at hand already.
 */
export async function* readRecords(
  file: RecordFile,
  range: ReadRange,
  tickOffset: bigint,
  token: CancelToken,
  slices: Slices = readSlices(file.source, file.plan, range),
  onEnd?: (offsetTick: bigint) => void,
): AsyncGenerator<TagBlock> {
  const { source, plan, decoding } = file;
  const decode = compileDecode(plan);
  const state = await stateBefore(source, plan, range.start, tickOffset);
  const decoder = openDecoder(plan, decoding);
  try {
    for await (const { first, bytes } of slices) {
      await passTurn(token);
      if (decoder === null) yield* decodeChunk(bytes, first, plan, decode, state, source.name);
      else yield* decodeSlice(bytes, first, plan, decoder, decode, state, source.name);
    }
  } finally {
    decoder?.close();
  }
  onEnd?.(state.offsetTick + BigInt(state.epochTick));
}

/**
 * Rollover ticks counted before record `start`: what `readRecords` needs to read from there. Reads everything before
 * `start` when the layout rolls over, continuing from `known` when that lies before it.
 */
export async function scanOffset(
  file: RecordFile,
  start: number,
  token: CancelToken,
  known: { start: number; offsetTick: bigint },
  onBytes?: (bytes: number) => void,
): Promise<bigint> {
  if (file.plan.rollover.in === 'none') return 0n;
  const from = known.start <= start ? known : { start: 0, offsetTick: 0n };
  const range = { start: from.start, end: start };
  const slices = readSlices(file.source, file.plan, range);
  return from.offsetTick + (await advanceOf(file, range, slices, token, onBytes));
}

/** Rollover ticks inside the range, whose slices are given. */
export async function advanceOf(
  file: RecordFile,
  range: ReadRange,
  slices: Slices,
  token: CancelToken,
  onBytes?: (bytes: number) => void,
): Promise<bigint> {
  let end = 0n;
  const blocks = readRecords(file, range, 0n, token, slices, (offsetTick) => {
    end = offsetTick;
  });
  for await (const { bytes } of blocks) onBytes?.(bytes);
  return end;
}

/** Decodes the bytes of records from `first` on into blocks of as many records as the decoder takes. */
function* decodeSlice(
  bytes: Uint8Array,
  first: number,
  plan: RecordPlan,
  decoder: RecordDecoder,
  decode: Decode,
  state: DecodeState,
  name: string,
): Generator<TagBlock> {
  const { recordBytes } = plan;
  const records = bytes.length / recordBytes;
  settleEpoch(state);
  const compiled = { epochTick: 0, previousTick: previousOf(state) };
  for (let start = 0; start < records; ) {
    const end = Math.min(records, start + decoder.capacity);
    const decoded = decoder.decode(bytes.subarray(start * recordBytes, end * recordBytes), compiled);
    yield {
      kind: 'tags',
      firstRecord: first + start,
      records: decoded.records,
      baseTick: state.offsetTick,
      deltaTick: decoded.deltaTick,
      channel: decoded.channel,
      count: decoded.deltaTick.length,
      bytes: decoded.records * recordBytes,
    };
    start += decoded.records;
    state.epochTick = compiled.epochTick;
    setPrevious(state, compiled.previousTick);
    if (start === end) continue;
    // The epoch is full: the readable decoder knows how to go on, for as long as there are records in this turn.
    yield* decodeChunk(
      bytes.subarray(start * recordBytes, end * recordBytes),
      first + start,
      plan,
      decode,
      state,
      name,
    );
    settleEpoch(state);
    compiled.epochTick = 0;
    compiled.previousTick = previousOf(state);
    start = end;
  }
}

function previousOf({ previousHigh, previousLow }: DecodeState): number {
  return previousHigh < 0 ? -1 : previousHigh * 2 ** 32 + previousLow;
}

function setPrevious(state: DecodeState, previousTick: number): void {
  state.previousHigh = previousTick < 0 ? -1 : Math.floor(previousTick / 2 ** 32);
  state.previousLow = previousTick < 0 ? 0 : previousTick % 2 ** 32;
}

/** Decodes the bytes of records from `first` on into one block, or several where the base must move. */
export function* decodeChunk(
  bytes: Uint8Array,
  first: number,
  plan: RecordPlan,
  decode: Decode,
  state: DecodeState,
  name: string,
): Generator<TagBlock> {
  const all = toRecordWords(bytes, plan);
  const words = withoutSkipped(all, plan);
  const records = all.length / plan.stride;
  state.next = 0;
  let blockStart = 0;
  settleEpoch(state);
  for (;;) {
    const out = createColumns(words.length / plan.stride - state.next);
    decodeAt(words, state, out, decode, `${name}, records ${first} to ${first + records}`);
    const done = state.next * plan.stride >= words.length;
    const blockEnd = done ? records : originOf(all, plan, state.next);
    if (state.count > 0 || done) {
      yield {
        kind: 'tags',
        firstRecord: first + blockStart,
        records: blockEnd - blockStart,
        baseTick: baseTickOf(state),
        deltaTick: out.deltaTick,
        channel: out.channel,
        count: state.count,
        bytes: (blockEnd - blockStart) * plan.recordBytes,
      };
      blockStart = blockEnd;
    }
    if (done) return;
    rebase(words, state, plan);
  }
}

/** Every chunk starts with an empty epoch, so that blocks of a long run rarely split inside. */
function settleEpoch(state: DecodeState): void {
  state.offsetTick += BigInt(state.epochTick);
  state.epochTick = 0;
  state.count = 0;
}

function decodeAt(
  words: Uint32Array,
  state: DecodeState,
  out: TagColumns,
  decode: Decode,
  place: string,
): void {
  try {
    decode(words, state, out);
  } catch (thrown) {
    if (thrown instanceof Problem) throw new Problem(thrown.code, thrown.message, place);
    throw thrown;
  }
}

/** Index in the whole chunk of the record that is number `keptIndex` once skipped ones are left out. */
function originOf(all: Uint32Array, plan: RecordPlan, keptIndex: number): number {
  if (plan.skip.length === 0) return keptIndex;
  let kept = 0;
  for (let at = 0; at < all.length; at += plan.stride) {
    if (isSkipped(all, at, plan)) continue;
    if (kept === keptIndex) return at / plan.stride;
    kept += 1;
  }
  return all.length / plan.stride;
}

function createColumns(length: number): TagColumns {
  return { deltaTick: new Float64Array(length), channel: new Uint16Array(length) };
}

/**
 * Decoding state at `start`. Where the time field wraps, the last time before `start` is fetched, so that a wrap right
 * at the border is seen; skipped records do not count, hence the search backwards page by page.
 */
async function stateBefore(
  source: ByteSource,
  plan: RecordPlan,
  start: number,
  tickOffset: bigint,
): Promise<DecodeState> {
  const state = createDecodeState(tickOffset);
  if (plan.rollover.in !== 'wrap') return state;
  const page = 4096;
  for (let end = start; end > 0; end -= page) {
    const bytes = await readRecordBytes(source, plan, Math.max(0, end - page), end);
    const words = withoutSkipped(toRecordWords(bytes, plan), plan);
    if (words.length === 0) continue;
    const at = words.length - plan.stride;
    state.previousHigh = timeHigh(words, at, plan);
    state.previousLow = timeLow(words, at, plan);
    return state;
  }
  return state;
}
