import type { ByteSource, ReadRange } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import type { RecordPlan } from './plan';

/** Bytes of the source a read: long enough that asking costs nothing, and two of them fit the last-level cache. */
const SLICE_BYTES = 2 ** 23;
/** Blocks of the readable decoder, and so slices, hold at most so many records. */
export const recordsPerSlice = 2 ** 20;

/** Memory of readings that have ended, for the next ones: each chunk of a file is one, and new memory costs time. */
const spare: Uint8Array[] = [];
const MOST_SPARE = 2;

export interface RecordSlice {
  first: number;
  /** Whole records from `first` on; to be overwritten once the next but one slice is asked for, or the reading ends. */
  bytes: Uint8Array;
}

/** Bytes of whole records [start, end). Throws `truncated` when the source gives fewer than it promised. */
export async function readRecordBytes(
  source: ByteSource,
  plan: RecordPlan,
  start: number,
  end: number,
  into?: Uint8Array,
): Promise<Uint8Array> {
  const from = plan.headerBytes + start * plan.recordBytes;
  const to = plan.headerBytes + end * plan.recordBytes;
  const bytes = await source.read(from, to, into);
  if (bytes.length === to - from) return bytes;
  throw new Problem(
    'truncated',
    `Expected ${to - from} bytes from byte ${from} of ${source.name}, found ${bytes.length}; the file became shorter while it was read, open it again.`,
    `${source.name}, byte ${from + bytes.length}`,
  );
}

/** The range slice by slice. While one is used the next is read already. With `keep` each has memory of its own. */
export async function* readSlices(
  source: ByteSource,
  plan: RecordPlan,
  range: ReadRange,
  keep = false,
): AsyncGenerator<RecordSlice> {
  const records = Math.max(1, Math.min(recordsPerSlice, Math.floor(SLICE_BYTES / plan.recordBytes)));
  const room = Math.min(records, range.end - range.start) * plan.recordBytes;
  const buffers = keep ? [] : [takeRoom(room), takeRoom(room)];
  const read = (first: number, turn: number): Promise<Uint8Array> | null => {
    if (first >= range.end) return null;
    const bytes = readRecordBytes(
      source,
      plan,
      first,
      Math.min(first + records, range.end),
      buffers[turn % 2],
    );
    // Where the slice before it fails or nobody goes on, nobody waits for this one; waiting for it still throws.
    bytes.catch(() => undefined);
    return bytes;
  };
  let ahead = read(range.start, 0);
  for (let first = range.start, turn = 1; ahead !== null; first += records, turn += 1) {
    const bytes = await ahead;
    ahead = read(first + records, turn);
    yield { first, bytes };
  }
  // Not where somebody stopped: the source may still be writing there.
  spare.push(...buffers.slice(0, MOST_SPARE - spare.length));
}

function takeRoom(bytes: number): Uint8Array {
  const at = spare.findIndex(({ length }) => length >= bytes);
  if (at >= 0) return spare.splice(at, 1)[0]!;
  // Too small for what is read now: else they would take the place of larger ones.
  spare.length = 0;
  return new Uint8Array(bytes);
}
