import type { Detector } from '../../../../shared/contracts/detector';
import type { Companion, Inspection, InspectionFacts } from '../../../../shared/contracts/engine';
import type { Layout } from '../../../../shared/contracts/layout';
import type { Plane } from '../../../../shared/contracts/plane';
import type { ProblemData } from '../../../../shared/errors/problem';

export type Reading =
  | { status: 'looking' }
  | { status: 'read'; inspection: Inspection }
  | { status: 'failed'; problem: ProblemData }
  /** Named by a saved session; its bytes are on the reader's machine and must be handed over again. */
  | { status: 'awaited' };

/** One file of an acquisition. */
export interface FilePart {
  name: string;
  bytes: number;
  /** null: named by a saved session and still to be handed over. */
  file: File | null;
  /** Known once a study has read the file. */
  sha256: string | null;
  /** Of the file a session was made with, where one was opened. */
  expectedSha256: string | null;
}

/** A second file of the same acquisition whose clock runs on its own. */
export interface CompanionFile extends FilePart, Omit<Companion, 'source'> {
  /** Channels seen in it; null until it was looked at. */
  facts: InspectionFacts | null;
}

/** One file on the shelf, or several that are one acquisition, with how it is read. */
export interface Acquisition extends FilePart {
  id: string;
  /** Files that go on where this one ends, in their order. */
  following: readonly FilePart[];
  companion: CompanionFile | null;
  /** Files of one drop share a number as long as they may be offered as one acquisition. */
  droppedWith: number | null;
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

/** In the order of the engine's provenance: the file, those that follow it, the second clock. */
export function partsOf(acquisition: Acquisition): readonly FilePart[] {
  const { following, companion } = acquisition;
  return [acquisition, ...following, ...(companion === null ? [] : [companion])];
}

export function bytesOf(acquisition: Acquisition): number {
  return partsOf(acquisition).reduce((sum, { bytes }) => sum + bytes, 0);
}

/** Same name and size as in the session, other bytes. */
export function isOtherFile(acquisition: Acquisition): boolean {
  return partsOf(acquisition).some(
    ({ sha256, expectedSha256 }) => sha256 !== null && expectedSha256 !== null && sha256 !== expectedSha256,
  );
}

export function newPart(file: File): FilePart {
  return { name: file.name, bytes: file.size, file, sha256: null, expectedSha256: null };
}

export function newAcquisition(
  id: string,
  what: { name: string; bytes: number; file: File | null; sample: string | null },
): Acquisition {
  return {
    id,
    ...what,
    following: [],
    companion: null,
    droppedWith: null,
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
