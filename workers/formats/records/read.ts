import type { TagBlock } from '../../../shared/contracts/blocks';
import type { ByteSource, CancelToken, ReadRange } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { passTurn } from '../turn';
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
import { isSkipped, toRecordWords, withoutSkipped } from './words';

/** Records a block: 4 to 16 MiB of the source, about 10 MiB of columns. */
export const recordsPerBlock = 2 ** 20;

/** Bytes of whole records [start, end). Throws `truncated` when the source gives fewer than it promised. */
export async function readRecordBytes(
  source: ByteSource,
  plan: RecordPlan,
  start: number,
  end: number,
): Promise<Uint8Array> {
  const from = plan.headerBytes + start * plan.recordBytes;
  const to = plan.headerBytes + end * plan.recordBytes;
  const bytes = await source.read(from, to);
  if (bytes.length === to - from) return bytes;
  throw new Problem(
    'truncated',
    `Expected ${to - from} bytes from byte ${from} of ${source.name}, found ${bytes.length}; the file became shorter while it was read, open it again.`,
    `${source.name}, byte ${from + bytes.length}`,
  );
}

/**
 * Blocks of the range, in file order. `tickOffset` is `scanOffset` of its start; `onEnd` hears that of its end. Memory is bounded by one block,
 * whatever the range.
 */
export async function* readRecords(
  source: ByteSource,
  plan: RecordPlan,
  range: ReadRange,
  tickOffset: bigint,
  token: CancelToken,
  onEnd?: (offsetTick: bigint) => void,
): AsyncGenerator<TagBlock> {
  const decode = compileDecode(plan);
  const state = await stateBefore(source, plan, range.start, tickOffset);
  for (let first = range.start; first < range.end; first += recordsPerBlock) {
    await passTurn(token);
    const end = Math.min(first + recordsPerBlock, range.end);
    const bytes = await readRecordBytes(source, plan, first, end);
    yield* decodeChunk(bytes, first, plan, decode, state, source.name);
  }
  onEnd?.(state.offsetTick + BigInt(state.epochTick));
}

/**
 * Rollover ticks counted before record `start`: what `readRecords` needs to read from there. Reads everything before
 * `start` when the layout rolls over, continuing from `known` when that lies before it.
 */
export async function scanOffset(
  source: ByteSource,
  plan: RecordPlan,
  start: number,
  token: CancelToken,
  known: { start: number; offsetTick: bigint },
  onBytes?: (bytes: number) => void,
): Promise<bigint> {
  if (plan.rollover.in === 'none') return 0n;
  const from = known.start <= start ? known : { start: 0, offsetTick: 0n };
  const decode = compileDecode(plan);
  const state = await stateBefore(source, plan, from.start, from.offsetTick);
  const out = createColumns(Math.max(0, Math.min(recordsPerBlock, start - from.start)));
  for (let first = from.start; first < start; first += recordsPerBlock) {
    await passTurn(token);
    const bytes = await readRecordBytes(source, plan, first, Math.min(first + recordsPerBlock, start));
    const words = withoutSkipped(toRecordWords(bytes, plan), plan);
    state.next = 0;
    state.count = 0;
    decode(words, state, out);
    while (state.next * plan.stride < words.length) {
      rebase(words, state, plan);
      decode(words, state, out);
    }
    onBytes?.(bytes.length);
  }
  return state.offsetTick + BigInt(state.epochTick);
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
