import type { TagSpec } from '../../shared/contracts/tally';
import type { TagColumns } from '../kernels/tag-columns';
import { EdgeKeeper, type EdgeTags } from './pair-cache-edges';
import { BYTES_PER_PAIR, type FoundPairs, type KeptPairs, keptBytes } from './pair-cache-store';
import type { SliceGrid, SliceRing } from './slice-grid';

/** Above this many pixels in both arms singles are not kept per pixel and slice, and another mask needs the bytes. */
export const MASKABLE_SITES = 8192;
/** Pairs sealed at a time: they and their copy stay in the last-level cache. */
export const SEALED_PAIRS = 2 ** 20;

/** What a range has kept beside its counts, as plain data. */
export interface KeptPart {
  stores: KeptPairs[];
  /** Tags per slice and site, [slice][site] over the slices of the tally; null for arms of too many pixels. */
  singles: Float64Array | null;
  edges: EdgeTags;
}

/**
 * Keeps every pair with tau in the range of `TagSpec.keepPairs`, and of the tags what another mask would change. Used by
 * the tag accumulator at the moments its counts change; the slice grid is that of the accumulator, pairs and tags per
 * slice and site come from its machine.
 * Memory: 7 bytes a pair, 16 MiB for those to be sealed, 8 bytes a slice and pixel.
 */
export class PairKeeper {
  readonly #found: FoundPairs;
  readonly #grid: SliceGrid;
  readonly #most: number;
  readonly #singles: SliceRing | null;
  #stores: KeptPairs[] = [];
  #edges = new EdgeKeeper();
  #isOverfull = false;

  constructor(
    range: NonNullable<TagSpec['keepPairs']>,
    grid: SliceGrid,
    found: FoundPairs,
    singles: SliceRing | null,
  ) {
    this.#found = found;
    this.#grid = grid;
    this.#most = range.most ?? Number.POSITIVE_INFINITY;
    this.#singles = singles;
    found.onGrowth = () => this.#makeRoom();
  }

  /** Bytes of the pairs so far. */
  get bytes(): number {
    return (
      this.#found.count * BYTES_PER_PAIR + this.#stores.reduce((sum, store) => sum + keptBytes(store), 0)
    );
  }

  /** More pairs than asked for were found: none is at hand any more. */
  get isOverfull(): boolean {
    return this.#isOverfull;
  }

  /** Sorted tags [start, stop) with times after `refTick`. */
  takeTags(tags: TagColumns, start: number, stop: number, refTick: bigint): void {
    this.#edges.offer(tags, start, stop, refTick);
  }

  /** After the grid doubled its slices; [first, first + count) were in use before. */
  fold(doublings: number, first: number, count: number): void {
    this.#found.fold(doublings, first);
    this.#singles?.fold(doublings, first, count);
  }

  /** Adds what the following range has kept over slices [first, first + count), shorter by `doublings` doublings. */
  merge(next: KeptPart, doublings: number, first: number, count: number): void {
    if (this.#isOverfull) return;
    this.#stores.push(...next.stores);
    this.#makeRoom();
    this.#edges.join(next.edges);
    if (next.singles !== null) this.#singles?.addDense(next.singles, first, count, doublings);
  }

  toPart(): KeptPart {
    this.#seal();
    return {
      stores: [...this.#stores],
      singles: this.#singles?.toDense(this.#grid.first, this.#grid.count) ?? null,
      edges: this.#edges.edges(),
    };
  }

  #makeRoom(): void {
    // Of the pairs found some may be beyond the range to be kept: sealing tells.
    if (this.#found.count >= SEALED_PAIRS || this.#pairs > this.#most) this.#seal();
    if (!this.#isOverfull && this.#pairs <= this.#most) return;
    this.#isOverfull = true;
    this.#stores = [];
    this.#found.clear();
  }

  get #pairs(): number {
    return this.#stores.reduce((sum, store) => sum + store.offset.length, this.#found.count);
  }

  /** Sealed stores are never written again and may be shared. */
  #seal(): void {
    if (this.#found.count === 0 || this.#isOverfull) return;
    this.#stores.push(this.#found.seal(this.#grid.bits, this.#grid.first));
    this.#found.clear();
  }
}
