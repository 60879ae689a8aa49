import type { Inspection } from '../../../../shared/contracts/engine';
import type {
  ArrayColumn,
  Column,
  Layout,
  RecordsLayout,
  TextLayout,
} from '../../../../shared/contracts/layout';
import { FS_PER_PS } from '../../../../shared/units/ticks';
import { TIME_UNITS } from '../../../components/output/input-words';

/** What stands in a layout form while it is being filled: numbers may be missing, nothing is converted yet. */
export interface LayoutDraft {
  format: DraftFormat;
  time: Column | null;
  channel: Column | null;
  frames: string | null;
  arrayTime: ArrayColumn | null;
  arrayChannel: ArrayColumn | null;
  /** `array` is left out where the file holds one array without a name. */
  arrayFrames: { array?: string | undefined } | null;
  recordBytes: number | null;
  byteOrder: 'little' | 'big';
  headerBytes: number | null;
  timeBits: BitDraft;
  channelBits: BitDraft;
  rollover: 'none' | 'wrap' | 'marker';
  markerBits: BitDraft;
  markerEquals: number | null;
  advanceTick: number | null;
  wraps: 'one' | 'time-field';
  /** Kept as they came; the dialog does not edit them. */
  moreWhen: Extract<RecordsLayout['rollover'], { in: 'marker' }>['when'];
  skip: RecordsLayout['skip'];
  delimiter: TextLayout['delimiter'];
  decimal: TextLayout['decimal'];
  headerLines: number | null;
  /** From 0, as in the layout; the form counts from 1. */
  timeColumn: number | null;
  channelColumn: number | null;
  /** A unit of TIME_UNITS, `tick` for whole ticks, `other` for `otherUnitPs`. */
  timeUnit: TimeUnit;
  otherUnitPs: number | null;
  tickPs: number | null;
}

export type DraftFormat =
  | 'hdf5-tags'
  | 'hdf5-frames'
  | 'records'
  | 'npy-tags'
  | 'npy-frames'
  | 'tiff'
  | 'text';
export type TimeUnit = (typeof TIME_UNITS)[number]['unit'] | 'tick' | 'other';

export interface BitDraft {
  firstBit: number | null;
  bits: number | null;
}

export const NO_BITS: BitDraft = { firstBit: null, bits: null };

export function isFrameFormat(format: DraftFormat): boolean {
  return format === 'hdf5-frames' || format === 'npy-frames' || format === 'tiff';
}

/** What an unknown layout is first taken for: what the reader that looked at the bytes can read. */
const FORMAT_OF_READER: Record<string, DraftFormat> = {
  jsfive: 'hdf5-tags',
  h5wasm: 'hdf5-tags',
  npy: 'npy-tags',
  tiff: 'tiff',
  text: 'text',
};

function formatOf(layout: Layout | null, looked: Inspection | null): DraftFormat {
  if (layout === null) return FORMAT_OF_READER[looked?.reader ?? ''] ?? 'records';
  if (layout.format === 'hdf5' || layout.format === 'npy') return `${layout.format}-${layout.kind}`;
  return layout.format;
}

function unitOf({ timeUnitFs, tickFs }: TextLayout): TimeUnit {
  const named = TIME_UNITS.find(({ fs }) => fs === timeUnitFs);
  return named?.unit ?? (timeUnitFs === tickFs ? 'tick' : 'other');
}

/** A form's first state: the layout, empty where nothing is known. */
export function draftLayout(layout: Layout | null, looked: Inspection | null): LayoutDraft {
  const records = layout?.format === 'records' ? layout : null;
  const marker = records?.rollover.in === 'marker' ? records.rollover : null;
  const hdf5 = layout?.format === 'hdf5' ? layout : null;
  const npy = layout?.format === 'npy' ? layout : null;
  const text = layout?.format === 'text' ? layout : null;
  const tags = hdf5?.kind === 'tags' ? hdf5 : null;
  const arrays = npy?.kind === 'tags' ? npy : null;
  const tickFs = layout?.kind === 'tags' ? layout.tickFs : undefined;
  return {
    format: formatOf(layout, looked),
    time: tags?.time ?? null,
    channel: tags?.channel ?? null,
    frames: hdf5?.kind === 'frames' ? hdf5.dataset : null,
    arrayTime: arrays?.time ?? null,
    arrayChannel: arrays?.channel ?? null,
    arrayFrames: npy?.kind === 'frames' ? { array: npy.array } : null,
    recordBytes: records?.recordBytes ?? null,
    byteOrder: records?.byteOrder ?? 'little',
    headerBytes: records?.headerBytes ?? 0,
    timeBits: records?.time ?? NO_BITS,
    channelBits: records?.channel ?? NO_BITS,
    rollover: records?.rollover.in ?? 'none',
    markerBits: marker?.when[0]?.field ?? NO_BITS,
    markerEquals: marker?.when[0]?.equals ?? null,
    advanceTick: marker?.advanceTick ?? null,
    wraps: marker?.wraps ?? 'one',
    moreWhen: marker?.when.slice(1) ?? [],
    skip: records?.skip ?? [],
    delimiter: text?.delimiter ?? 'comma',
    decimal: text?.decimal ?? 'point',
    headerLines: text?.headerLines ?? 0,
    timeColumn: text?.timeColumn ?? 0,
    channelColumn: text?.channelColumn ?? 1,
    timeUnit: text === null ? 'ps' : unitOf(text),
    otherUnitPs: text === null ? null : text.timeUnitFs / FS_PER_PS,
    tickPs: tickFs === undefined ? null : tickFs / FS_PER_PS,
  };
}
