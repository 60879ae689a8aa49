import type { Detector } from '../../../../shared/contracts/detector';
import type { Inspection } from '../../../../shared/contracts/engine';
import type { Layout } from '../../../../shared/contracts/layout';
import type { Plane } from '../../../../shared/contracts/plane';
import type { ProblemData } from '../../../../shared/errors/problem';

export type Reading =
  | { status: 'looking' }
  | { status: 'read'; inspection: Inspection }
  | { status: 'failed'; problem: ProblemData }
  /** Named by a saved session; its bytes are on the reader's machine and must be handed over again. */
  | { status: 'awaited' };

/** One file on the shelf, with how it is read. */
export interface Acquisition {
  id: string;
  name: string;
  bytes: number;
  file: File | null;
  /** Known once a study has read the file. */
  sha256: string | null;
  /** Of the file a session was made with, where one was opened. */
  expectedSha256: string | null;
  /** Name among the samples that come with Gemel. */
  sample: string | null;
  reading: Reading;
  layout: Layout | null;
  /** True once a person or a preset said so; else it is the engine's proposal. */
  layoutGiven: boolean;
  detector: Detector | null;
  /** False: proposed from the channel numbers, its pitch not known. */
  detectorGiven: boolean;
  plane: Plane | null;
}

export function kindOf(acquisition: Acquisition): 'tags' | 'frames' | null {
  return acquisition.layout?.kind ?? null;
}

/** Same name and size as in the session, other bytes. */
export function isOtherFile({ sha256, expectedSha256 }: Acquisition): boolean {
  return sha256 !== null && expectedSha256 !== null && sha256 !== expectedSha256;
}

export function newAcquisition(
  id: string,
  what: { name: string; bytes: number; file: File | null; sample: string | null },
): Acquisition {
  return {
    id,
    ...what,
    sha256: null,
    expectedSha256: null,
    reading: what.file === null ? { status: 'awaited' } : { status: 'looking' },
    layout: null,
    layoutGiven: false,
    detector: null,
    detectorGiven: false,
    plane: null,
  };
}
