import { type ArrayMap, type Detector, detectorSchema } from '../../../../shared/contracts/detector';
import {
  type BitField,
  type Column,
  type Layout,
  layoutSchema,
  type RecordsLayout,
} from '../../../../shared/contracts/layout';
import { type Calibrated, type Plane, planeSchema } from '../../../../shared/contracts/plane';
import { FS_PER_PS } from '../../../../shared/units/ticks';
import type { z } from '../../../../shared/util/zod';
import { UNKNOWN_PITCH_UM } from './propose-detector';

/** What stands in the reading dialog while it is being filled: numbers may be missing, nothing is converted yet. */
export interface ReadingDraft {
  format: 'hdf5-tags' | 'hdf5-frames' | 'records';
  time: Column | null;
  channel: Column | null;
  frames: string | null;
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
  tickPs: number | null;
  signal: ArrayDraft | null;
  idler: ArrayDraft | null;
  bucket: { channel: number | null; delayPs: number | null } | null;
  framePitchUm: number | null;
  frameMasked: string;
  plane: PlaneDraft;
}

export interface BitDraft {
  firstBit: number | null;
  bits: number | null;
}

export interface ArrayDraft {
  width: number | null;
  height: number | null;
  firstChannel: number | null;
  order: 'rows' | 'columns';
  flipX: boolean;
  flipY: boolean;
  pitchUm: number | null;
  masked: string;
  delayPs: number | null;
  pixelDelayPs: readonly number[];
}

export interface NumberDraft {
  value: number | null;
  sigma: number | null;
}

export interface PlaneDraft {
  kind: 'none' | 'near' | 'far';
  magnification: NumberDraft;
  focalLengthMm: NumberDraft;
  signalNm: NumberDraft;
  idlerNm: NumberDraft;
}

const NO_BITS: BitDraft = { firstBit: null, bits: null };
const NO_NUMBER: NumberDraft = { value: null, sigma: null };

export function emptyArray(firstChannel: number | null): ArrayDraft {
  return {
    width: null,
    height: null,
    firstChannel,
    order: 'rows',
    flipX: false,
    flipY: false,
    pitchUm: null,
    masked: '',
    delayPs: 0,
    pixelDelayPs: [],
  };
}

function draftArray(array: ArrayMap, pitchKnown: boolean): ArrayDraft {
  const { maskedPixels, pitchUm, ...rest } = array;
  return { ...rest, masked: maskedPixels.join(', '), pitchUm: pitchKnown ? pitchUm : null };
}

function draftPlane(plane: Plane | null): PlaneDraft {
  const near = plane?.kind === 'near' ? plane : null;
  const far = plane?.kind === 'far' ? plane : null;
  return {
    kind: plane?.kind ?? 'none',
    magnification: near?.magnification ?? NO_NUMBER,
    focalLengthMm: far?.focalLengthMm ?? NO_NUMBER,
    signalNm: far?.signalNm ?? NO_NUMBER,
    idlerNm: far?.idlerNm ?? NO_NUMBER,
  };
}

/** The dialog's first state: what is known of the acquisition, empty where nothing is. */
export function draftReading(
  layout: Layout | null,
  detector: Detector | null,
  detectorGiven: boolean,
  plane: Plane | null,
  isHdf5: boolean,
): ReadingDraft {
  const records = layout?.format === 'records' ? layout : null;
  const tags = layout?.format === 'hdf5' && layout.kind === 'tags' ? layout : null;
  const marker = records?.rollover.in === 'marker' ? records.rollover : null;
  const tagDetector = detector?.kind === 'tags' ? detector : null;
  const frameDetector = detector?.kind === 'frames' ? detector : null;
  const tickFs = records?.tickFs ?? tags?.tickFs;
  const framesLayout = layout?.kind === 'frames' ? layout : null;
  return {
    format: framesLayout ? 'hdf5-frames' : records || (layout === null && !isHdf5) ? 'records' : 'hdf5-tags',
    time: tags?.time ?? null,
    channel: tags?.channel ?? null,
    frames: framesLayout?.dataset ?? null,
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
    tickPs: tickFs === undefined ? null : tickFs / FS_PER_PS,
    signal: tagDetector?.signal ? draftArray(tagDetector.signal, detectorGiven) : null,
    idler: tagDetector?.idler ? draftArray(tagDetector.idler, detectorGiven) : null,
    bucket: tagDetector?.bucket ?? null,
    framePitchUm: detectorGiven ? (frameDetector?.pitchUm ?? null) : null,
    frameMasked: frameDetector?.maskedPixels.join(', ') ?? '',
    plane: draftPlane(plane),
  };
}

/** Sentences by field, e.g. "signal.width". */
export type DraftErrors = Record<string, string>;

function collect(error: z.ZodError, prefix: string, errors: DraftErrors): void {
  for (const { path, message, code } of error.issues) {
    const field = [prefix, ...path.map(String)].filter((part) => part !== '').join('.');
    errors[field] ??= code === 'invalid_type' ? 'Missing: write a number.' : `${message}.`;
  }
}

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
  collect(error, '', found);
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

/** "3, 17 18" as pixel numbers; null where something else stands. */
export function readPixels(text: string): number[] | null {
  const words = text.split(/[\s,;]+/).filter((word) => word !== '');
  const pixels = words.map(Number);
  return pixels.every((pixel) => Number.isInteger(pixel) && pixel >= 0) ? pixels : null;
}

function checkPixels(text: string, count: number, field: string, errors: DraftErrors): number[] {
  const pixels = readPixels(text);
  if (pixels === null) errors[field] = 'Write pixel numbers with commas between, for example 17, 18.';
  else if (count > 0 && pixels.some((pixel) => pixel >= count))
    errors[field] = `Pixels run from 0 to ${count - 1} (y × width + x).`;
  return pixels ?? [];
}

function buildArray(draft: ArrayDraft, arm: string, pitchNeeded: boolean, errors: DraftErrors): unknown {
  const { masked, pitchUm, ...rest } = draft;
  const count = (draft.width ?? 0) * (draft.height ?? 0);
  if (draft.width === null) errors[`${arm}.width`] = 'Write how many pixels it is wide.';
  if (draft.height === null) errors[`${arm}.height`] = 'Write how many pixels it is high.';
  if (draft.firstChannel === null) errors[`${arm}.firstChannel`] = 'Write the channel of its first pixel.';
  if (pitchUm === null && pitchNeeded) errors[`${arm}.pitchUm`] = PITCH_MISSING;
  return {
    ...rest,
    delayPs: draft.delayPs ?? 0,
    maskedPixels: checkPixels(masked, count, `${arm}.masked`, errors),
    pitchUm: pitchUm ?? UNKNOWN_PITCH_UM,
    pixelDelayPs: draft.pixelDelayPs.length === count ? [...draft.pixelDelayPs] : [],
  };
}

const PITCH_MISSING = 'Write the pixel pitch: lengths in the calibrated plane rest on it.';

export interface DetectorReading {
  detector: Detector | null;
  /** The pitch is a person's, not a stand-in. */
  given: boolean;
  errors: DraftErrors;
}

export function readDetector(draft: ReadingDraft): DetectorReading {
  const errors: DraftErrors = {};
  const pitchNeeded = draft.plane.kind !== 'none';
  if (draft.format === 'hdf5-frames') {
    if (draft.framePitchUm === null && pitchNeeded) errors['frames.pitchUm'] = PITCH_MISSING;
    const parsed = detectorSchema.safeParse({
      version: 1,
      kind: 'frames',
      pitchUm: draft.framePitchUm ?? UNKNOWN_PITCH_UM,
      maskedPixels: checkPixels(draft.frameMasked, 0, 'frames.masked', errors),
    });
    if (!parsed.success) collect(parsed.error, 'frames', errors);
    const detector = parsed.success && Object.keys(errors).length === 0 ? parsed.data : null;
    return { detector, given: draft.framePitchUm !== null, errors };
  }
  const arms = (['signal', 'idler'] as const).flatMap((arm) => {
    const array = draft[arm];
    return array === null ? [] : [[arm, array] as const];
  });
  if (arms.length === 0) errors.arms = 'Name at least one array: signal or idler.';
  const built = Object.fromEntries(
    arms.map(([arm, array]) => [arm, buildArray(array, arm, pitchNeeded, errors)]),
  );
  const bucket =
    draft.bucket === null ? {} : { bucket: { ...draft.bucket, delayPs: draft.bucket.delayPs ?? 0 } };
  if (draft.bucket !== null && draft.bucket.channel === null)
    errors['bucket.channel'] = 'Write the channel of the bucket.';
  const parsed = detectorSchema.safeParse({ version: 1, kind: 'tags', ...built, ...bucket });
  if (!parsed.success) collect(parsed.error, '', errors);
  else checkOverlap(parsed.data, errors);
  return {
    detector: parsed.success && Object.keys(errors).length === 0 ? parsed.data : null,
    given: arms.every(([, array]) => array.pitchUm !== null),
    errors,
  };
}

function checkOverlap(detector: Detector, errors: DraftErrors): void {
  if (detector.kind !== 'tags' || !detector.signal || !detector.idler) return;
  const span = ({ firstChannel, width, height }: ArrayMap) =>
    [firstChannel, firstChannel + width * height - 1] as const;
  const [s, i] = [span(detector.signal), span(detector.idler)];
  if (s[0] <= i[1] && i[0] <= s[1])
    errors['idler.firstChannel'] = `Channels ${i[0]} to ${i[1]} overlap the signal's ${s[0]} to ${s[1]}.`;
}

function calibrated(draft: NumberDraft, field: string, errors: DraftErrors): Calibrated {
  if (draft.value === null) errors[field] = 'Write the value.';
  else if (draft.value <= 0) errors[field] = 'It must be above zero.';
  else if (draft.sigma === null) errors[field] = 'Write its uncertainty too; 0 if it counts as exact.';
  return { value: draft.value ?? Number.NaN, sigma: draft.sigma ?? Number.NaN };
}

export function readPlane({ plane: draft }: ReadingDraft): { plane: Plane | null; errors: DraftErrors } {
  const errors: DraftErrors = {};
  if (draft.kind === 'none') return { plane: null, errors };
  const candidate =
    draft.kind === 'near'
      ? {
          version: 1,
          kind: 'near',
          magnification: calibrated(draft.magnification, 'plane.magnification', errors),
        }
      : {
          version: 1,
          kind: 'far',
          focalLengthMm: calibrated(draft.focalLengthMm, 'plane.focalLengthMm', errors),
          signalNm: calibrated(draft.signalNm, 'plane.signalNm', errors),
          idlerNm: calibrated(draft.idlerNm, 'plane.idlerNm', errors),
        };
  const parsed = planeSchema.safeParse(candidate);
  if (!parsed.success && Object.keys(errors).length === 0) collect(parsed.error, 'plane', errors);
  return { plane: parsed.success ? parsed.data : null, errors };
}

/** One choice in the list of columns. */
export interface ColumnOption {
  value: string;
  label: string;
  hint: string;
  column: Column;
}

const INTEGER = /^u?int/;

/** Integer columns a person can point to: 1-D datasets, members of compounds, columns of narrow 2-D datasets. */
export function columnOptions(
  datasets: readonly { path: string; shape: number[]; type: string; fields: string[] }[],
): ColumnOption[] {
  return datasets.flatMap(({ path, shape, type, fields }): ColumnOption[] => {
    const [rows = 0, columns = 0] = shape;
    const hint = `${type} · ${shape.join(' × ')}`;
    const option = (column: Column, label: string): ColumnOption => ({
      value: JSON.stringify([column.dataset, column.field ?? null]),
      label,
      hint,
      column,
    });
    if (rows === 0) return [];
    if (fields.length > 0 && shape.length === 1)
      return fields.map((field) => option({ dataset: path, field }, `${path} · ${field}`));
    if (!INTEGER.test(type)) return [];
    if (shape.length === 1) return [option({ dataset: path }, path)];
    if (shape.length === 2 && columns >= 2 && columns <= 16)
      return Array.from({ length: columns }, (_, field) =>
        option({ dataset: path, field }, `${path} · column ${field}`),
      );
    return [];
  });
}

export function frameOptions(datasets: readonly { path: string; shape: number[]; type: string }[]) {
  return datasets
    .filter(({ shape, type }) => shape.length === 3 && INTEGER.test(type))
    .map(({ path, shape, type }) => ({ value: path, label: path, hint: `${type} · ${shape.join(' × ')}` }));
}
