import type { ArrayMap, Detector } from '../../../../shared/contracts/detector';
import type { Column, Layout, RecordsLayout } from '../../../../shared/contracts/layout';
import type { Plane } from '../../../../shared/contracts/plane';
import { FS_PER_PS } from '../../../../shared/units/ticks';

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
  const framesLayout = layout?.format === 'hdf5' && layout.kind === 'frames' ? layout : null;
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
