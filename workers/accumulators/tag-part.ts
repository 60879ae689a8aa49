import type { TagSpec, TagTally } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import type { KeptPart } from './pair-cache-keeper';
import type { TagBorderPart } from './tag-border';

/** Version 1. What one range has counted, plus the tags at its ends that may meet those of its neighbours. */
export interface TagPart {
  part: 1;
  kind: 'tags';
  tally: TagTally;
  head: TagBorderPart;
  tail: TagBorderPart;
  /** With `TagSpec.keepPairs` only. */
  kept?: KeptPart;
}

/** What the tally says when no window was asked for: an empty one. */
export const NO_WINDOW: NonNullable<TagSpec['window']> = { loTick: 0, hiTick: -1, shiftsTick: [] };

/** @throws Problem `newer-version` for a part of a later engine, `bad-input` for one of other arms or windows. */
export function assertTagPart(spec: TagSpec, part: TagPart): void {
  if (part.part !== 1) {
    throw new Problem(
      'newer-version',
      `A part of version 1 was expected, version ${String(part.part)} was found; use the engine that wrote it.`,
    );
  }
  if (!fitsSpec(spec, part)) {
    throw new Problem(
      'bad-input',
      'The part was counted with another detector map, histogram or window; use parts of one run.',
    );
  }
}

function fitsSpec(spec: TagSpec, part: TagPart): boolean {
  if (part.kind !== 'tags') return false;
  const { a, b, histogram, window, tickFs } = part.tally;
  const { loTick, binTick, bins } = spec.histogram;
  const wanted = spec.window ?? NO_WINDOW;
  return (
    tickFs === spec.tickFs &&
    a.width === spec.a.width &&
    a.height === spec.a.height &&
    b.width === spec.b.width &&
    b.height === spec.b.height &&
    histogram.loTick === loTick &&
    histogram.binTick === binTick &&
    histogram.counts.length === bins &&
    [window.loTick, window.hiTick, ...window.shiftsTick].join() ===
      [wanted.loTick, wanted.hiTick, ...wanted.shiftsTick].join()
  );
}
