import type { Inspection } from '../../../../shared/contracts/engine';
import type { Layout } from '../../../../shared/contracts/layout';
import { type Acquisition, type CompanionFile, kindOf } from './acquisition';
import { proposeOffset } from './companion';
import type { DraftErrors } from './draft-errors';
import { draftLayout, type LayoutDraft } from './layout-draft';

/** What stands in the dialog of the second clock. */
export interface CompanionDraft {
  layout: LayoutDraft;
  channelOffset: number | null;
  clock: 'found' | 'given';
  offsetPs: number | null;
  /** Parts per million. */
  driftPpm: number | null;
}

const PPM = 1e-6;

export function draftCompanion(
  layout: Layout | null,
  looked: Inspection | null,
  main: Acquisition,
  held: CompanionFile | null,
): CompanionDraft {
  const seen = main.reading.status === 'read' ? main.reading.inspection.facts : null;
  const clock = held?.clock ?? null;
  return {
    layout: draftLayout(layout, looked),
    channelOffset: held?.channelOffset ?? (looked === null ? 0 : proposeOffset(seen, looked.facts)),
    clock: clock === null ? 'found' : 'given',
    offsetPs: clock?.offsetPs ?? 0,
    driftPpm: clock === null ? 0 : clock.drift / PPM,
  };
}

export function readClock(draft: CompanionDraft): {
  clock: CompanionFile['clock'];
  channelOffset: number;
  errors: DraftErrors;
} {
  const errors: DraftErrors = {};
  const { channelOffset, offsetPs, driftPpm } = draft;
  if (channelOffset === null) errors.channelOffset = 'Write what is added to its channels; 0 for nothing.';
  if (draft.clock === 'given') {
    if (offsetPs === null) errors.offsetPs = 'Write how far the two clocks are apart at the start.';
    if (driftPpm === null) errors.driftPpm = 'Write by how much it runs slower; 0 for nothing.';
  }
  const clock = draft.clock === 'found' ? null : { offsetPs: offsetPs ?? 0, drift: (driftPpm ?? 0) * PPM };
  return { clock, channelOffset: channelOffset ?? 0, errors };
}

/** Acquisitions on the shelf that could be the second clock of this one. */
export function companionCandidates(shelf: readonly Acquisition[], main: Acquisition): Acquisition[] {
  return shelf.filter(
    (a) =>
      a.id !== main.id &&
      a.file !== null &&
      a.reading.status === 'read' &&
      a.following.length === 0 &&
      a.companion === null &&
      kindOf(a) !== 'frames',
  );
}
