import type { InspectionFacts } from '../../shared/contracts/engine';
import type { Reader } from '../../shared/contracts/reader';

/** Frames looked at by an inspection: up to this many, and about this many pixels. */
const mostFrames = 64;
const mostPixels = 2 ** 23;

type FrameFacts = Extract<InspectionFacts, { kind: 'frames' }>;

/** Largest values of integer pixels; 64-bit ones are read as doubles and never reach theirs. */
const fullScale: Record<string, number> = {
  uint8: 255,
  int8: 127,
  uint16: 65535,
  int16: 32767,
  uint32: 4294967295,
  int32: 2147483647,
};

/** Mean and largest pixel over the first frames, and what looks wrong. */
export async function summariseFrames(
  reader: Reader,
  shape: { frames: number; width: number; height: number; type: string },
): Promise<{ facts: FrameFacts; warnings: string[] }> {
  const { frames, width, height, type } = shape;
  const pixels = width * height;
  const sampled = Math.min(frames, Math.max(1, Math.min(mostFrames, Math.floor(mostPixels / pixels))));
  let sum = 0;
  let max = Number.NEGATIVE_INFINITY;
  let invalid = 0;
  for await (const block of reader.read({ start: 0, end: sampled }, 0n, { cancelled: false })) {
    if (block.kind !== 'frames') continue;
    for (const value of block.pixels) {
      if (!Number.isFinite(value)) invalid += 1;
      else {
        sum += value;
        if (value > max) max = value;
      }
    }
  }
  const valid = sampled * pixels - invalid;
  const part = sampled === 1 ? 'first frame' : `first ${sampled} frames`;
  const warnings: string[] = [];
  if (invalid > 0)
    warnings.push(
      `${invalid} pixels of the ${part} are no finite numbers; mask them or save the frames again.`,
    );
  if (frames < 2) warnings.push('There is one frame only; covariances need at least two.');
  if (valid > 0 && max === 0 && sum === 0) warnings.push(`All pixels of the ${part} are zero.`);
  if (max === fullScale[type]) {
    warnings.push(
      `Some pixels of the ${part} hold ${max}, the most ${type} can hold: they are saturated or marked.`,
    );
  }
  const mean = valid > 0 ? sum / valid : 0;
  return {
    facts: { kind: 'frames', frames, width, height, type, mean, max: valid > 0 ? max : 0, sampled },
    warnings,
  };
}
