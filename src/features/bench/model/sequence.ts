import { type Acquisition, type FilePart, newAcquisition } from './acquisition';

/** One acquisition in several files: which files look like it, and how they are put together and taken apart. */

/** As people count: run-2 before run-10. */
const collator = new Intl.Collator('en', { numeric: true, sensitivity: 'base' });

function extensionOf(name: string): string {
  return /\.[^.]+$/.exec(name)?.[0].toLowerCase() ?? '';
}

/** Equal for files that may be parts of one acquisition: extension, layout, and the size of frames. */
function likeness({ name, layout, reading }: Acquisition): string | null {
  if (reading.status !== 'read') return null;
  const { facts } = reading.inspection;
  const frame = facts.kind === 'frames' ? [facts.width, facts.height, facts.type] : null;
  return JSON.stringify([extensionOf(name), layout, frame]);
}

export interface SequenceOffer {
  ids: readonly string[];
  names: readonly string[];
}

/** Files of one drop that look like parts of one acquisition, once all of that drop have been looked at. */
export function sequenceOffers(shelf: readonly Acquisition[]): SequenceOffer[] {
  const drops = new Map<number, Acquisition[]>();
  for (const acquisition of shelf) {
    const { droppedWith } = acquisition;
    if (droppedWith !== null) drops.set(droppedWith, [...(drops.get(droppedWith) ?? []), acquisition]);
  }
  return [...drops.values()].flatMap((drop) => {
    if (drop.some(({ reading }) => reading.status === 'looking')) return [];
    const alike = new Map<string, Acquisition[]>();
    for (const acquisition of drop) {
      const key = likeness(acquisition);
      if (key !== null) alike.set(key, [...(alike.get(key) ?? []), acquisition]);
    }
    return [...alike.values()].flatMap((group) => {
      if (group.length < 2) return [];
      const inOrder = [...group].sort((a, b) => collator.compare(a.name, b.name));
      return [{ ids: inOrder.map(({ id }) => id), names: inOrder.map(({ name }) => name) }];
    });
  });
}

const partOf = ({ name, bytes, file, sha256, expectedSha256 }: FilePart): FilePart => ({
  name,
  bytes,
  file,
  sha256,
  expectedSha256,
});

/** Files in the order they are read. */
export function sequenceOf(acquisition: Acquisition): readonly FilePart[] {
  return [acquisition, ...acquisition.following];
}

function withSequence(acquisition: Acquisition, files: readonly FilePart[]): Acquisition {
  const [first = acquisition, ...following] = files;
  return { ...acquisition, ...partOf(first), following: following.map(partOf) };
}

/** The acquisitions as one, read as the first of them is; it stands where that one stood. */
export function joinAcquisitions(
  shelf: readonly Acquisition[],
  ids: readonly string[],
): readonly Acquisition[] {
  const joined = ids.flatMap((id) => shelf.find((a) => a.id === id) ?? []);
  const [first, ...others] = joined;
  if (first === undefined || others.length === 0) return shelf;
  const gone = new Set(others.map(({ id }) => id));
  const whole = withSequence({ ...first, droppedWith: null }, joined.flatMap(sequenceOf));
  return shelf.filter(({ id }) => !gone.has(id)).map((a) => (a.id === first.id ? whole : a));
}

/** With the file at place `from` moved to place `to`. */
export function moveFile(acquisition: Acquisition, from: number, to: number): Acquisition {
  const files = [...sequenceOf(acquisition)];
  const [moved] = files.splice(from, 1);
  if (moved === undefined || to < 0 || to > files.length) return acquisition;
  files.splice(to, 0, moved);
  return withSequence(acquisition, files);
}

/** Every file an acquisition of its own, read as the whole was; the others stand after the first and wait to be looked at. */
export function splitAcquisition(
  shelf: readonly Acquisition[],
  id: string,
  nextId: () => string,
): { shelf: readonly Acquisition[]; added: readonly string[] } {
  const added: string[] = [];
  const parted = shelf.flatMap((acquisition): Acquisition[] => {
    if (acquisition.id !== id) return [acquisition];
    const others = acquisition.following.map((part): Acquisition => {
      const { layout, layoutGiven, detector, detectorGiven, plane } = acquisition;
      const { name, bytes, file } = part;
      const own = newAcquisition(nextId(), { name, bytes, file, sample: null });
      added.push(own.id);
      return { ...own, ...partOf(part), layout, layoutGiven, detector, detectorGiven, plane };
    });
    return [{ ...acquisition, following: [] }, ...others];
  });
  return { shelf: parted, added };
}
