import type { Scenario } from '../../shared/contracts/scenario';
import { frameRun, optics, tagRun } from './bench';

/** Bytes that a tag takes uncompressed: 8 as a record, 10 as two HDF5 columns. */
const RECORD_BYTES = 8;
const TAG_BYTES = 10;
/** Tags per second of the bench: both arms with darks and background. */
const TAGS_PER_SECOND = 1.3e6;
const LARGE_SIDE = 256;

/** Runs of about `megabytes` each (10^6 bytes, before compression). */
export function largeRuns(megabytes: number): { file: string; scenario: Scenario }[] {
  const bytes = megabytes * 1e6;
  const seconds = (tagBytes: number): number => bytes / tagBytes / TAGS_PER_SECOND;
  const frames = Math.max(2, Math.round(bytes / LARGE_SIDE ** 2));
  return [
    {
      file: 'near-tags.bin',
      scenario: tagRun({
        name: 'Lanternfield near field, long',
        seed: 4201,
        seconds: seconds(RECORD_BYTES),
        optics: optics.near,
      }),
    },
    {
      file: 'far-tags.h5',
      scenario: tagRun({
        name: 'Lanternfield far field, long',
        seed: 4202,
        seconds: seconds(TAG_BYTES),
        optics: optics.far,
        file: { gzip: 1, structure: 'recent' },
      }),
    },
    {
      file: 'near-frames.h5',
      scenario: frameRun({
        name: 'Lanternfield near field, many frames',
        seed: 4203,
        frames,
        side: LARGE_SIDE,
        optics: optics.near,
        // Clicks pack so well that a packed file would not be large.
        file: { gzip: 0 },
      }),
    },
  ];
}
