import type { TagSpec } from '../../shared/contracts/tally';
import type { TagColumns } from '../kernels/tag-columns';
import type { PairCandidates } from '../kernels/tag-scan';
import { EdgeKeeper, type EdgeTags } from './pair-cache-edges';
import { BYTES_PER_PAIR, type KeptPairs, keptBytes, PairColumnsKept } from './pair-cache-store';
import { type SliceGrid, SliceRing, type SlotClock, sliceEnd, slotOf } from './slice-grid';

/** Above this many pixels in both arms singles are not kept per pixel and slice, and another mask needs the bytes. */
const MASKABLE_SITES = 8192;

/** What a range has kept beside its counts, as plain data. */
export interface KeptPart {
  stores: KeptPairs[];
  /** Tags per slice and site, [slice][site] over the slices of the tally; null for arms of too many pixels. */
  singles: Float64Array | null;
  edges: EdgeTags;
}

/**
 * Keeps every pair with tau in the range of `TagSpec.keepPairs`, and of the tags what another mask would change. Used by
 * the tag accumulator at the moments its counts change; the slice grid is that of the accumulator.
 * Memory: 7 bytes a pair, 8 bytes a slice and pixel.
 */
export class PairKeeper {
  readonly #found: PairColumnsKept;
  readonly #sites: number;
  readonly #most: number;
  readonly #singles: SliceRing | null;
  #stores: KeptPairs[] = [];
  #edges = new EdgeKeeper();
  #isOverfull = false;

  constructor(spec: TagSpec, range: NonNullable<TagSpec['keepPairs']>) {
    this.#found = new PairColumnsKept(range);
    this.#most = range.most ?? Number.POSITIVE_INFINITY;
    this.#sites = spec.a.width * spec.a.height + spec.b.width * spec.b.height;
    this.#singles = this.#sites <= MASKABLE_SITES ? new SliceRing(this.#sites) : null;
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

  /** Candidates of a scan, before the windows choose among them. */
  takePairs(candidates: PairCandidates, count: number, clock: SlotClock): void {
    if (this.#isOverfull) return;
    this.#found.add(candidates, count, clock);
    this.#checkRoom();
  }

  /** Sorted tags [start, stop) with times after `refTick`, which the grid covers already. */
  takeTags(tags: TagColumns, start: number, stop: number, refTick: bigint, grid: SliceGrid): void {
    this.#edges.offer(tags, start, stop, refTick);
    if (this.#singles === null) return;
    const { time, site } = tags;
    const { counts } = this.#singles;
    const clock = grid.clockAt(refTick);
    for (let i = start; i < stop; ) {
      const end = sliceEnd(clock, time[i]!);
      const row = slotOf(clock, time[i]!) * this.#sites;
      for (; i < stop && time[i]! < end; i++) counts[row + site[i]!]! += 1;
    }
  }

  /** After the grid doubled its slices; [first, first + count) were in use before. */
  fold(doublings: number, first: number, count: number): void {
    this.#found.fold(doublings, first);
    this.#singles?.fold(doublings, first, count);
  }

  /** Adds what the following range has kept, whose grid is `nextGrid`; this one's covers it already. */
  merge(next: PairKeeper, nextGrid: SliceGrid, doublings: number): void {
    this.#stores.push(...next.#sealed(nextGrid));
    this.#checkRoom();
    this.#edges.join(next.#edges);
    if (next.#singles !== null) {
      this.#singles?.addRing(next.#singles, doublings, nextGrid.first, nextGrid.count);
    }
  }

  toPart(grid: SliceGrid): KeptPart {
    return {
      stores: this.#sealed(grid),
      singles: this.#singles?.toDense(grid.first, grid.count) ?? null,
      edges: this.#edges.edges(),
    };
  }

  load(part: KeptPart, grid: SliceGrid): void {
    this.#stores = [...part.stores];
    this.#edges = new EdgeKeeper(part.edges);
    if (part.singles !== null) this.#singles?.addDense(part.singles, grid.first, grid.count);
  }

  #checkRoom(): void {
    const pairs = this.#stores.reduce((sum, store) => sum + store.offset.length, this.#found.count);
    if (pairs <= this.#most) return;
    this.#isOverfull = true;
    this.#stores = [];
    this.#found.clear();
  }

  /** Sealed stores are never written again and may be shared. */
  #sealed(grid: SliceGrid): KeptPairs[] {
    const sealed = this.#found.count === 0 ? [] : [this.#found.seal(grid.bits, grid.first)];
    return [...this.#stores, ...sealed];
  }
}
