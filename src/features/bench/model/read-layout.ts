import { type BitField, type Layout, layoutSchema } from '../../../../shared/contracts/layout';
import { FS_PER_PS } from '../../../../shared/units/ticks';
import type { z } from '../../../../shared/util/zod';
import { collectIssues, type DraftErrors } from './draft-errors';
import type { BitDraft, ReadingDraft } from './reading-draft';

function bits(draft: BitDraft): BitField {
  // Missing numbers fail the schema below with a sentence at their field.
  return { firstBit: draft.firstBit ?? Number.NaN, bits: draft.bits ?? Number.NaN };
}

const fs = (tickPs: number | null): number => (tickPs ?? Number.NaN) * FS_PER_PS;

function buildLayout(draft: ReadingDraft): unknown {
  if (draft.format === 'hdf5-frames')
    return { version: 1, format: 'hdf5', kind: 'frames', dataset: draft.frames };
  if (draft.format === 'hdf5-tags') {
    const { time, channel } = draft;
    return { version: 1, format: 'hdf5', kind: 'tags', time, channel, tickFs: fs(draft.tickPs) };
  }
  const marker = {
    in: 'marker',
    when: [{ field: bits(draft.markerBits), equals: draft.markerEquals }, ...draft.moreWhen],
    advanceTick: draft.advanceTick,
    wraps: draft.wraps,
  };
  return {
    version: 1,
    format: 'records',
    kind: 'tags',
    recordBytes: draft.recordBytes,
    byteOrder: draft.byteOrder,
    headerBytes: draft.headerBytes,
    time: bits(draft.timeBits),
    channel: bits(draft.channelBits),
    rollover: draft.rollover === 'marker' ? marker : { in: draft.rollover },
    skip: draft.skip,
    tickFs: fs(draft.tickPs),
  };
}

const FIELD_OF_LAYOUT: Record<string, string> = { tickFs: 'tickPs', dataset: 'frames' };

export function readLayout(draft: ReadingDraft): { layout: Layout | null; errors: DraftErrors } {
  const parsed = layoutSchema.safeParse(buildLayout(draft));
  const errors: DraftErrors = {};
  if (draft.format !== 'hdf5-frames' && !(draft.tickPs !== null && draft.tickPs > 0))
    errors.tickPs = 'Write how long one tick is, in picoseconds.';
  if (draft.format === 'hdf5-tags') {
    if (draft.time === null) errors.time = 'Choose the dataset that holds the times.';
    if (draft.channel === null) errors.channel = 'Choose the dataset that holds the channels.';
  }
  if (draft.format === 'hdf5-frames' && draft.frames === null)
    errors.frames = 'Choose the dataset that holds the frames.';
  if (draft.format === 'records') {
    checkRecords(draft, errors);
    const single = parsed.success ? null : recordsIssues(draft);
    if (single !== null) collectRenamed(single, errors);
  }
  return { layout: parsed.success && Object.keys(errors).length === 0 ? parsed.data : null, errors };
}

/** A union's error names no field; the records schema alone does. */
function recordsIssues(draft: ReadingDraft): z.ZodError | null {
  const records = layoutSchema.options[2];
  const parsed = records.safeParse(buildLayout(draft));
  return parsed.success ? null : parsed.error;
}

function collectRenamed(error: z.ZodError, errors: DraftErrors): void {
  const found: DraftErrors = {};
  collectIssues(error, '', found);
  for (const [path, sentence] of Object.entries(found)) errors[FIELD_OF_LAYOUT[path] ?? path] ??= sentence;
}

function checkRecords(draft: ReadingDraft, errors: DraftErrors): void {
  const width = (draft.recordBytes ?? 0) * 8;
  const check = (field: string, draftBits: BitDraft, name: string): void => {
    const { firstBit, bits: count } = draftBits;
    if (firstBit === null || count === null)
      errors[field] = `Say where the ${name} begins and how many bits it has.`;
    else if (width > 0 && firstBit + count > width)
      errors[field] = `Bits ${firstBit} to ${firstBit + count - 1} do not fit a record of ${width} bits.`;
  };
  if (draft.recordBytes === null) errors.recordBytes = 'Say how many bytes one record has.';
  check('time', draft.timeBits, 'time');
  check('channel', draft.channelBits, 'channel');
  if (draft.rollover !== 'marker') return;
  check('marker', draft.markerBits, 'marker');
  if (draft.markerEquals === null) errors['marker.equals'] = 'Say which value marks a rollover.';
  if (draft.advanceTick === null) errors['marker.advance'] = 'Say how many ticks one rollover adds.';
}
