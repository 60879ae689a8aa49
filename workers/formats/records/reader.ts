import type { RecordsLayout } from '../../../shared/contracts/layout';
import type { ByteSource, Reader, ReadRange, RecordDecoding } from '../../../shared/contracts/reader';
import { assertRange } from '../ranges';
import { countRecords, planRecords, type RecordPlan } from './plan';
import { advanceOf, type RecordFile, readRecords, scanOffset } from './read';
import { type RecordSlice, readSlices } from './slices';

/** Opens a file of fixed-width records. Throws `empty-file`, `wrong-length` or `bad-layout`. */
export function openRecords(source: ByteSource, layout: RecordsLayout, decoding?: RecordDecoding): Reader {
  const plan = planRecords(layout);
  const records = countRecords(plan, source.size, source.name);
  return recordsReader(source, plan, records, layout.tickFs, decoding);
}

/** Reader over the first `records` records, whatever follows them. */
export function recordsReader(
  source: ByteSource,
  plan: RecordPlan,
  records: number,
  tickFs: number,
  decoding?: RecordDecoding,
): Reader {
  const file: RecordFile = { source, plan, decoding };
  // Ranges are mostly asked for in rising order: each scan goes on from where the last scan or range ended.
  let known = { start: 0, offsetTick: 0n };
  let kept: { range: ReadRange; slices: RecordSlice[] } | null = null;
  const inside = (range: ReadRange): ReadRange => assertRange(range, records, 'records', source.name);

  /** Those of an `advanceOf` before, handed out once. */
  const takeKept = (range: ReadRange): RecordSlice[] | null => {
    const found = kept;
    kept = null;
    return found?.range.start === range.start && found.range.end === range.end ? found.slices : null;
  };

  return {
    facts: { kind: 'tags', records, tickFs, reader: 'records' },
    tickOffsetAt: async (start, token, onBytes) => {
      inside({ start, end: records });
      const offsetTick = await scanOffset(file, start, token, known, onBytes);
      known = { start, offsetTick };
      return offsetTick;
    },
    ...(plan.rollover.in === 'none'
      ? {}
      : {
          advanceOf: async (range, token) => {
            inside(range);
            const slices: RecordSlice[] = [];
            const advance = await advanceOf(file, range, keepingTo(slices, file, range), token);
            kept = { range, slices };
            return advance;
          },
        }),
    read: (range, tickOffset, token) => {
      // An offset from elsewhere (none, or that of files before this one) says nothing of the rollovers in here.
      const isOwn = known.start === range.start && known.offsetTick === tickOffset;
      return readRecords(
        file,
        inside(range),
        tickOffset,
        token,
        takeKept(range) ?? undefined,
        (offsetTick) => {
          if (isOwn) known = { start: range.end, offsetTick };
        },
      );
    },
    close: () => source.close(),
  };
}

async function* keepingTo(
  slices: RecordSlice[],
  { source, plan }: RecordFile,
  range: ReadRange,
): AsyncGenerator<RecordSlice> {
  for await (const slice of readSlices(source, plan, range, true)) {
    slices.push(slice);
    yield slice;
  }
}
