import type { TagBlock } from '../../shared/contracts/blocks';
import type { TagColumns } from '../kernels/tag-columns';
import type { FoundPairs } from './pair-cache-store';
import type { PairStore } from './pair-store';
import type { SliceRing, SlotClock } from './slice-grid';

/**
 * The loops of the tag accumulator over tags and pairs, and the counters they fill. Two of one meaning: in TypeScript
 * (`ScriptTagMachine`, the reference) and compiled (`CompiledTagMachine`), which may be released.
 */
export interface TagMachine {
  /** Tags a turn that suit its caches. */
  readonly pieceTags: number;
  /** Tags it works on: those of before that may still meet others, then the new ones. */
  readonly work: TagColumns;
  readonly prompt: PairStore;
  readonly shifted: PairStore;
  /** Tags per site, and the delay histogram. Complete after `settle`. */
  readonly singles: Float64Array;
  readonly histogram: Float64Array;
  /** With `TagSpec.keepPairs`: the pairs found, and tags per slice and site (null for arms of too many pixels). */
  readonly found: FoundPairs | null;
  readonly sitesPerSlice: SliceRing | null;
  /** The block that `take` takes from, until the next. */
  begin(block: TagBlock): void;
  /** Appends the kept ones of the block's tags [from, to), delays applied, and counts singles. */
  take(from: number, to: number, latest: number): Disorder;
  sort(start: number, stop: number): void;
  /** Tags of arm A in [start, stop). */
  countArmA(start: number, stop: number): number;
  /** Counts the tags [start, stop) in `sitesPerSlice`, all of them in the slice of one slot. */
  countSites(start: number, stop: number, slot: number): void;
  /** Counts the pairs within the sorted tags [start, stop). */
  scanWithin(start: number, stop: number, clock: SlotClock): void;
  /** Counts the pairs of one of the first `workStop` tags and one of `tags` [start, stop), both sorted. */
  scanBorder(workStop: number, tags: TagColumns, start: number, stop: number, clock: SlotClock): void;
  settle(): void;
  /** Nobody wants the pairs and sites per slice any more. */
  dropKept(): void;
  /** Gives its memory back; it must not be used any more. */
  release(): void;
}

export interface Disorder {
  /** The latest time so far. */
  latest: number;
  /** Tags taken that came more than the horizon after a later one. */
  late: number;
  /** Those taken are known to be in order of time. */
  isSorted: boolean;
}
