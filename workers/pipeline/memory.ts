import type { TallySpec } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { blockWindow, jointPixels } from '../accumulators/frame-part';
import { compiledLength } from '../kernels/frame-transform-tables';

/** One accumulator may take this much; each compute worker holds one, the coordinator one and a copy. */
const LIMIT_BYTES = 2 ** 30;
/** Bootstrap slices a tag accumulator keeps at most. */
const SLICES = 128;
/** Prompt and shifted windows. */
const STORES = 2;

/** Bytes an accumulator of this specification can grow to, by its largest arrays. */
export function estimateBytes(spec: TallySpec): number {
  if (spec.kind === 'frames') {
    const { width, height, blocks } = spec;
    const cells = (2 * height - 1) * (2 * width - 1);
    const { nx, ny } = blockWindow(spec);
    // Spectra, maps and a batch of frames in the kernels: 70 to 115 bytes a padded pixel.
    const kernels = 115 * compiledLength(width) * compiledLength(height);
    // Joint distribution of a region: single precision in the kernels, half of it in doubles here.
    const joint = 8 * jointPixels(spec) ** 2;
    return 8 * nx * ny * blocks + 16 * cells + 8 * (width * width + height * height) + kernels + joint;
  }
  if (spec.window === null) return 8 * spec.histogram.bins;
  const { a, b } = spec;
  const perSlice = a.width * b.width + a.height * b.height + a.width * a.height + b.width * b.height;
  return 8 * (SLICES * STORES * perSlice + spec.histogram.bins);
}

/** Refuses before anything is allocated: a worker out of memory takes everything counted with it. */
export function assertFitsMemory(name: string, spec: TallySpec): void {
  const bytes = estimateBytes(spec);
  if (bytes <= LIMIT_BYTES) return;
  const need = `${(bytes / 2 ** 30).toFixed(1)} GiB a worker, and at most ${LIMIT_BYTES / 2 ** 30} GiB are taken`;
  const wayOut =
    spec.kind === 'frames'
      ? `Frames of ${spec.width} x ${spec.height} in ${spec.blocks} bootstrap blocks need ${need}; crop or bin the frames, or set the dial "blocks" lower.`
      : `Arrays of ${spec.a.width} x ${spec.a.height} and ${spec.b.width} x ${spec.b.height} pixels need ${need}; describe a smaller part of the arrays in the detector map.`;
  throw new Problem('unsupported', wayOut, name);
}
