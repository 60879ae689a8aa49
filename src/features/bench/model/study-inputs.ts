import type { Detector } from '../../../../shared/contracts/detector';
import type { RunInput } from '../../../../shared/contracts/engine';
import type { InputSpec, StudyInfo } from '../../../../shared/contracts/study';
import { type Acquisition, kindOf, partsOf } from './acquisition';
import { sourceOf } from './file-source';

/** Input name -> acquisition id; null where a person took it away on purpose. */
export type Assignment = Record<string, string | null>;

export interface Need {
  /** What is missing, as a sentence. */
  sentence: string;
  /** Whose reading dialog settles it; null: open or drop a file. */
  acquisitionId: string | null;
}

function hasArms(detector: Detector | null, spec: InputSpec): boolean {
  if (detector === null || detector.kind === 'frames') return true;
  return [spec.arms, ...(spec.otherArms ?? [])].some((arms) =>
    arms.every((arm) => detector[arm] !== undefined),
  );
}

/** Could this acquisition serve this input, as far as is known now? */
export function fits(acquisition: Acquisition, spec: InputSpec): boolean {
  const kind = kindOf(acquisition);
  return kind !== null && spec.accepts.includes(kind);
}

/** How well it serves: what it is calibrated for first, then what its name says. */
function score(acquisition: Acquisition, spec: InputSpec): number {
  if (!fits(acquisition, spec)) return -1;
  let points = 0;
  if (spec.plane === 'near' || spec.plane === 'far') {
    if (acquisition.plane !== null) points += acquisition.plane.kind === spec.plane ? 8 : -4;
  } else if (spec.plane === 'any' && acquisition.plane !== null) points += 1;
  if (acquisition.name.toLowerCase().includes(spec.name.toLowerCase())) points += 4;
  if (kindOf(acquisition) === 'tags' && acquisition.detector !== null)
    points += hasArms(acquisition.detector, spec) ? 2 : -3;
  return points;
}

/**
 * Gives every input without one the acquisition that serves it best; what a person chose stays, as long as it is on the
 * shelf. One acquisition serves one input, unless a person says otherwise.
 */
export function assignInputs(
  study: StudyInfo,
  shelf: readonly Acquisition[],
  chosen: Assignment,
): Record<string, string | null> {
  const onShelf = new Set(shelf.map(({ id }) => id));
  const given = Object.fromEntries(Object.entries(chosen).filter(([, id]) => id === null || onShelf.has(id)));
  const taken = new Set(Object.values(given));
  const pairs = study.inputs
    .filter(({ name }) => !(name in given))
    .flatMap((spec) =>
      shelf
        .filter(({ id }) => !taken.has(id))
        .map((acquisition) => ({ spec, id: acquisition.id, points: score(acquisition, spec) })),
    )
    .filter(({ points }) => points >= 0)
    .sort((a, b) => b.points - a.points);
  const result: Record<string, string | null> = Object.fromEntries(
    study.inputs.map(({ name }) => [name, given[name] ?? null]),
  );
  for (const { spec, id } of pairs) {
    if (taken.has(id) || result[spec.name] !== null) continue;
    result[spec.name] = id;
    taken.add(id);
  }
  return result;
}

const KIND_WORDS = { tags: 'time tags', frames: 'frames' };

function armsWords({ arms, otherArms = [] }: InputSpec): string {
  return [arms, ...otherArms].map((set) => set.join(' and ')).join(', or ');
}

/** What is missing before this input can be read; null when it is complete. */
export function needOf(spec: InputSpec, acquisition: Acquisition | undefined): Need | null {
  const kinds = spec.accepts.map((kind) => KIND_WORDS[kind]).join(' or ');
  if (acquisition === undefined)
    return { sentence: `${spec.label}: an acquisition with ${kinds} is needed.`, acquisitionId: null };
  const at = { acquisitionId: acquisition.id };
  const { name, reading, sample } = acquisition;
  if (reading.status === 'awaited' && sample !== null)
    return { sentence: `The sample ${name} is on its way from the server.`, acquisitionId: null };
  const missing = partsOf(acquisition).find(({ file }) => file === null);
  if (missing !== undefined)
    return { sentence: `Drop ${missing.name} again: its bytes stay on your machine.`, acquisitionId: null };
  if (reading.status === 'looking') return { sentence: `Looking at ${name}.`, ...at };
  if (reading.status === 'failed') return { sentence: `${name} could not be read; see the shelf.`, ...at };
  if (acquisition.layout === null) return { sentence: `Say how the bytes of ${name} are laid out.`, ...at };
  if (!fits(acquisition, spec))
    return { sentence: `${spec.label} takes ${kinds}, and ${name} holds something else.`, ...at };
  const { detector, plane } = acquisition;
  if (detector === null || detector.kind !== acquisition.layout.kind)
    return { sentence: `${name} has no detector map yet.`, ...at };
  if (!hasArms(detector, spec))
    return { sentence: `The detector map of ${name} must name ${armsWords(spec)}.`, ...at };
  if (spec.plane === 'none') return null;
  if (plane === null)
    return {
      sentence: `${name} needs its plane${spec.plane === 'any' ? '' : `, the ${spec.plane} field`}, with the calibration.`,
      ...at,
    };
  if (spec.plane !== 'any' && plane.kind !== spec.plane)
    return {
      sentence: `${spec.label} needs the ${spec.plane} field; ${name} is set to the ${plane.kind} field.`,
      ...at,
    };
  if (!acquisition.detectorGiven)
    return { sentence: `Give the pixel pitch of ${name}, so that lengths are right.`, ...at };
  return null;
}

/** The files beside the first, where there are any; all are here, `needOf` saw to it. */
function restOfFiles({ following, companion }: Acquisition): Pick<RunInput, 'following' | 'companion'> {
  const files = following.flatMap(({ file }) => file ?? []);
  const sequence = files.length === 0 ? {} : { following: files.map(sourceOf) };
  if (companion === null || companion.file === null) return sequence;
  const { file, layout, channelOffset, clock } = companion;
  return { ...sequence, companion: { source: sourceOf(file), layout, channelOffset, clock } };
}

export interface Readiness {
  needs: Need[];
  /** Complete only when nothing is needed. */
  inputs: Record<string, RunInput>;
}

export function readyInputs(
  study: StudyInfo,
  shelf: readonly Acquisition[],
  assignment: Record<string, string | null>,
): Readiness {
  const needs: Need[] = [];
  const inputs: Record<string, RunInput> = {};
  for (const spec of study.inputs) {
    const acquisition = shelf.find(({ id }) => id === assignment[spec.name]);
    const need = needOf(spec, acquisition);
    if (need !== null || !acquisition?.file || !acquisition.layout || !acquisition.detector) {
      if (need !== null) needs.push(need);
      continue;
    }
    inputs[spec.name] = {
      source: sourceOf(acquisition.file),
      ...restOfFiles(acquisition),
      layout: acquisition.layout,
      detector: acquisition.detector,
      plane: spec.plane === 'none' ? null : acquisition.plane,
    };
  }
  return { needs, inputs };
}
