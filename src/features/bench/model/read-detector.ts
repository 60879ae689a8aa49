import { type ArrayMap, type Detector, detectorSchema } from '../../../../shared/contracts/detector';
import { type Calibrated, type Plane, planeSchema } from '../../../../shared/contracts/plane';
import { collectIssues, type DraftErrors } from './draft-errors';
import { isFrameFormat } from './layout-draft';
import { UNKNOWN_PITCH_UM } from './propose-detector';
import type { ArrayDraft, NumberDraft, ReadingDraft } from './reading-draft';

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
  if (isFrameFormat(draft.format)) {
    if (draft.framePitchUm === null && pitchNeeded) errors['frames.pitchUm'] = PITCH_MISSING;
    const parsed = detectorSchema.safeParse({
      version: 1,
      kind: 'frames',
      pitchUm: draft.framePitchUm ?? UNKNOWN_PITCH_UM,
      maskedPixels: checkPixels(draft.frameMasked, 0, 'frames.masked', errors),
    });
    if (!parsed.success) collectIssues(parsed.error, 'frames', errors);
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
  if (!parsed.success) collectIssues(parsed.error, '', errors);
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
  if (!parsed.success && Object.keys(errors).length === 0) collectIssues(parsed.error, 'plane', errors);
  return { plane: parsed.success ? parsed.data : null, errors };
}
