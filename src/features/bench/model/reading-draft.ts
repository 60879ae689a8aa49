import type { ArrayMap, Detector } from '../../../../shared/contracts/detector';
import type { Inspection } from '../../../../shared/contracts/engine';
import type { Layout } from '../../../../shared/contracts/layout';
import type { Plane } from '../../../../shared/contracts/plane';
import { draftLayout, type LayoutDraft } from './layout-draft';

/** What stands in the reading dialog while it is being filled. */
export interface ReadingDraft extends LayoutDraft {
  signal: ArrayDraft | null;
  idler: ArrayDraft | null;
  bucket: { channel: number | null; delayPs: number | null } | null;
  framePitchUm: number | null;
  frameMasked: string;
  plane: PlaneDraft;
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
  looked: Inspection | null,
): ReadingDraft {
  const tagDetector = detector?.kind === 'tags' ? detector : null;
  const frameDetector = detector?.kind === 'frames' ? detector : null;
  return {
    ...draftLayout(layout, looked),
    signal: tagDetector?.signal ? draftArray(tagDetector.signal, detectorGiven) : null,
    idler: tagDetector?.idler ? draftArray(tagDetector.idler, detectorGiven) : null,
    bucket: tagDetector?.bucket ?? null,
    framePitchUm: detectorGiven ? (frameDetector?.pitchUm ?? null) : null,
    frameMasked: frameDetector?.maskedPixels.join(', ') ?? '',
    plane: draftPlane(plane),
  };
}
