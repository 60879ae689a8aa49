import type { RecordsLayout } from '../../../shared/contracts/layout';
import type { ByteSource, Reader } from '../../../shared/contracts/reader';
import { assertRange } from '../ranges';
import { countRecords, planRecords, type RecordPlan } from './plan';
import { readRecords, scanOffset } from './read';

/** Opens a file of fixed-width records. Throws `empty-file`, `wrong-length` or `bad-layout`. */
export function openRecords(source: ByteSource, layout: RecordsLayout): Reader {
  const plan = planRecords(layout);
  return recordsReader(source, plan, countRecords(plan, source.size, source.name), layout.tickFs);
}

/** Reader over the first `records` records, whatever follows them. */
export function recordsReader(source: ByteSource, plan: RecordPlan, records: number, tickFs: number): Reader {
  // Ranges are mostly asked for in rising order: each scan goes on from where the last scan or range ended.
  let known = { start: 0, offsetTick: 0n };
  return {
    facts: { kind: 'tags', records, tickFs, reader: 'records' },
    tickOffsetAt: async (start, token, onBytes) => {
      assertRange({ start, end: records }, records, 'records', source.name);
      const offsetTick = await scanOffset(source, plan, start, token, known, onBytes);
      known = { start, offsetTick };
      return offsetTick;
    },
    read: (range, tickOffset, token) => {
      // An offset from elsewhere (none, or that of files before this one) says nothing of the rollovers in here.
      const isOwn = known.start === range.start && known.offsetTick === tickOffset;
      return readRecords(
        source,
        plan,
        assertRange(range, records, 'records', source.name),
        tickOffset,
        token,
        (offsetTick) => {
          if (isOwn) known = { start: range.end, offsetTick };
        },
      );
    },
    close: () => source.close(),
  };
}
