import {
  type BitField,
  hdf5FramesLayoutSchema,
  hdf5TagsLayoutSchema,
  type Layout,
  npyFramesLayoutSchema,
  npyTagsLayoutSchema,
  recordsLayoutSchema,
  textLayoutSchema,
  tiffLayoutSchema,
} from '../../../../shared/contracts/layout';
import { FS_PER_PS } from '../../../../shared/units/ticks';
import { TIME_UNITS } from '../../../components/output/input-words';
import { collectIssues, type DraftErrors } from './draft-errors';
import { type BitDraft, isFrameFormat, type LayoutDraft } from './layout-draft';

function bits(draft: BitDraft): BitField {
  // Missing numbers fail the schema below with a sentence at their field.
  return { firstBit: draft.firstBit ?? Number.NaN, bits: draft.bits ?? Number.NaN };
}

const fs = (ps: number | null): number => (ps ?? Number.NaN) * FS_PER_PS;

function timeUnitFs({ timeUnit, otherUnitPs, tickPs }: LayoutDraft): number {
  if (timeUnit === 'tick') return fs(tickPs);
  return TIME_UNITS.find(({ unit }) => unit === timeUnit)?.fs ?? fs(otherUnitPs);
}

/** The schemas one by one: the error of their union would name no field. */
const SCHEMAS = {
  'hdf5-tags': hdf5TagsLayoutSchema,
  'hdf5-frames': hdf5FramesLayoutSchema,
  records: recordsLayoutSchema,
  'npy-tags': npyTagsLayoutSchema,
  'npy-frames': npyFramesLayoutSchema,
  tiff: tiffLayoutSchema,
  text: textLayoutSchema,
} as const;

function buildLayout(draft: LayoutDraft): unknown {
  const tickFs = fs(draft.tickPs);
  switch (draft.format) {
    case 'hdf5-frames':
      return { version: 1, format: 'hdf5', kind: 'frames', dataset: draft.frames };
    case 'hdf5-tags':
      return { version: 1, format: 'hdf5', kind: 'tags', time: draft.time, channel: draft.channel, tickFs };
    case 'npy-frames':
      return { version: 1, format: 'npy', kind: 'frames', ...draft.arrayFrames };
    case 'npy-tags': {
      const { arrayTime: time, arrayChannel: channel } = draft;
      return { version: 1, format: 'npy', kind: 'tags', time, channel, tickFs };
    }
    case 'tiff':
      return { version: 1, format: 'tiff', kind: 'frames' };
    case 'text': {
      const { delimiter, decimal, headerLines, timeColumn, channelColumn } = draft;
      const columns = { delimiter, decimal, headerLines, timeColumn, channelColumn };
      return { version: 1, format: 'text', kind: 'tags', ...columns, timeUnitFs: timeUnitFs(draft), tickFs };
    }
    case 'records':
      return buildRecords(draft, tickFs);
  }
}

function buildRecords(draft: LayoutDraft, tickFs: number): unknown {
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
    tickFs,
  };
}

const FIELD_OF_LAYOUT: Record<string, string> = {
  tickFs: 'tickPs',
  dataset: 'frames',
  array: 'frames',
  timeUnitFs: 'timeUnit',
};

export function readLayout(draft: LayoutDraft): { layout: Layout | null; errors: DraftErrors } {
  const errors: DraftErrors = {};
  if (!isFrameFormat(draft.format) && !(draft.tickPs !== null && draft.tickPs > 0))
    errors.tickPs = 'Write how long one tick is, in picoseconds.';
  if (draft.format === 'records') checkRecords(draft, errors);
  else if (draft.format === 'text') checkText(draft, errors);
  else checkColumns(draft, errors);
  const parsed = SCHEMAS[draft.format].safeParse(buildLayout(draft));
  if (!parsed.success) collectRenamed(parsed.error, errors);
  return { layout: parsed.success && Object.keys(errors).length === 0 ? parsed.data : null, errors };
}

type Issues = Parameters<typeof collectIssues>[0];

function collectRenamed(error: Issues, errors: DraftErrors): void {
  const found: DraftErrors = {};
  collectIssues(error, '', found);
  for (const [path, sentence] of Object.entries(found)) {
    const field = FIELD_OF_LAYOUT[path] ?? path;
    // One sentence a field: what the checks said of the whole field stands for its parts as well.
    if (errors[field.split('.')[0]!] === undefined) errors[field] ??= sentence;
  }
}

function checkColumns(draft: LayoutDraft, errors: DraftErrors): void {
  const { format } = draft;
  const isNpy = format === 'npy-tags' || format === 'npy-frames';
  const what = isNpy ? 'array' : 'dataset';
  if (format === 'hdf5-tags' || format === 'npy-tags') {
    if ((isNpy ? draft.arrayTime : draft.time) === null)
      errors.time = `Choose the ${what} that holds the times.`;
    if ((isNpy ? draft.arrayChannel : draft.channel) === null)
      errors.channel = `Choose the ${what} that holds the channels.`;
  } else if (format !== 'tiff' && (isNpy ? draft.arrayFrames : draft.frames) === null)
    errors.frames = `Choose the ${what} that holds the frames.`;
}

function checkText(draft: LayoutDraft, errors: DraftErrors): void {
  if (draft.headerLines === null) errors.headerLines = 'Write how many lines come before the first tag.';
  if (draft.timeColumn === null) errors.timeColumn = 'Write which column holds the times.';
  if (draft.channelColumn === null) errors.channelColumn = 'Write which column holds the channels.';
  else if (draft.channelColumn === draft.timeColumn)
    errors.channelColumn = 'Times and channels cannot stand in one column.';
  if (draft.decimal === 'comma' && draft.delimiter === 'comma')
    errors.decimal = 'A comma cannot both part the columns and mark the decimals.';
  if (draft.timeUnit === 'other' && !(draft.otherUnitPs !== null && draft.otherUnitPs > 0))
    errors.timeUnit = 'Write how many picoseconds one unit of the time column is.';
}

function checkRecords(draft: LayoutDraft, errors: DraftErrors): void {
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
