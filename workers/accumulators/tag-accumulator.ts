import type { TagBlock } from '../../shared/contracts/blocks';
import type { ArmSpec, ArmTally, TagSpec, TagTally } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { firstAtLeast } from '../kernels/tag-sort';
import type { TagWasm } from '../kernels/tag-wasm';
import { type KeptPart, PairKeeper } from './pair-cache-keeper';
import { addInto } from './pair-store';
import { SliceGrid, SliceRing, sliceEnd, slotOf } from './slice-grid';
import {
  borderFromPart,
  borderToPart,
  createBorder,
  joinHeads,
  offerToHead,
  rebaseTail,
  type TagBorder,
} from './tag-border';
import type { TagMachine } from './tag-machine';
import { canCompile, compileMachine } from './tag-machine-compiled';
import { ScriptTagMachine } from './tag-machine-script';
import { assertTagPart, NO_WINDOW, type TagPart } from './tag-part';
import { planTags, type TagPlan } from './tag-plan';

/**
 * Counts tags and all pairs of one range of an acquisition. At every moment all pairs among the tags so far are
 * counted, so a look or a merge needs no flush: a block is paired within itself and with the tail of what came before,
 * and a later range is paired with the tail through its head.
 *
 * Exact for any chunking and any split as long as no tag comes after one that is later by more than the horizon (5 ms
 * plus the spread of channel delays). Tags that do are counted as `outOfOrder` and as singles, and paired with what is
 * still at hand; pairs lost that way may depend on the chunking.
 *
 * Without a window the pair tallies hold `pairs` (zeros) and empty arrays otherwise.
 */
export class TagAccumulator {
  readonly kind = 'tags';
  readonly #spec: TagSpec;
  readonly #plan: TagPlan;
  readonly #grid: SliceGrid;
  readonly #machine: TagMachine;
  /** Cells: arm A, arm B. */
  readonly #singlesPerSlice = new SliceRing(2);
  /** null when no pairs are to be kept, or no longer all of them are. */
  #keeper: PairKeeper | null;
  #head = createBorder();
  /** Its tags are those the machine works on. */
  readonly #tail: TagBorder;
  #records = 0;
  #tags = 0;
  #unmapped = 0;
  #outOfOrder = 0;

  constructor(spec: TagSpec, kernels: TagWasm | null = null, leastBits = 0) {
    this.#spec = spec;
    this.#plan = planTags(spec);
    this.#grid = new SliceGrid(spec.tickFs, leastBits);
    this.#machine =
      kernels !== null && canCompile(kernels, spec, this.#plan)
        ? compileMachine(kernels, spec, this.#plan)
        : new ScriptTagMachine(spec, this.#plan);
    const { found, sitesPerSlice } = this.#machine;
    this.#keeper =
      spec.keepPairs && found ? new PairKeeper(spec.keepPairs, this.#grid, found, sitesPerSlice) : null;
    this.#tail = createBorder(this.#machine.work);
  }

  /** Takes the next block of this range, whatever its length. */
  push(block: TagBlock): void {
    if (block.kind !== 'tags') {
      throw new Problem('bad-input', 'Time tags were expected but frames were found; choose a tag file.');
    }
    this.#records += block.records;
    rebaseTail(this.#tail, block.baseTick);
    this.#machine.begin(block);
    const { count, baseTick } = block;
    const { pieceTags } = this.#machine;
    for (let from = 0; from < count; from += pieceTags) {
      this.#pushPiece(from, Math.min(from + pieceTags, count), baseTick);
    }
  }

  /** Tags [from, to) of the block the machine was given. */
  #pushPiece(from: number, to: number, baseTick: bigint): void {
    const machine = this.#machine;
    const { work } = machine;
    const start = work.count;
    const { latest, late, isSorted } = machine.take(from, to, this.#tail.markTick);
    this.#tail.markTick = latest;
    this.#outOfOrder += late;
    const stop = work.count;
    this.#unmapped += to - from - (stop - start);
    if (stop === start) return;
    if (this.#tags === 0) {
      this.#head.refTick = baseTick + BigInt(work.time[start]!);
      this.#head.markTick = this.#plan.horizonTick + this.#plan.reachTick;
    }
    this.#tags += stop - start;
    if (!isSorted) machine.sort(start, stop);
    const { time } = work;
    this.#cover(baseTick + BigInt(time[start]!), baseTick + BigInt(time[stop - 1]!));
    this.#countPerSlice(start, stop);
    this.#keeper?.takeTags(work, start, stop, baseTick);
    offerToHead(this.#head, work, start, stop, baseTick);
    const clock = this.#grid.clockAt(baseTick);
    machine.scanBorder(start, work, start, stop, clock);
    machine.scanWithin(start, stop, clock);
    // Both the tail and what was appended to it are in order.
    if (start > 0 && work.time[start - 1]! > work.time[start]!) machine.sort(0, stop);
    this.#trimTail();
  }

  /** Adds the range that follows this one in the acquisition. `next` stays as it is. */
  merge(next: TagAccumulator): void {
    if (!(next instanceof TagAccumulator)) {
      throw new Problem(
        'bad-input',
        'Tag counts can only be merged with tag counts of the same acquisition.',
      );
    }
    this.mergePart(next.toPart());
  }

  /**
   * Adds the range that follows this one in the acquisition.
   * @throws Problem `newer-version` for a part of a later engine, `bad-input` for one of other arms or windows.
   */
  mergePart(part: TagPart): void {
    assertTagPart(this.#spec, part);
    const { tally, kept } = part;
    this.#records += tally.records;
    this.#unmapped += tally.unmapped;
    this.#outOfOrder += tally.outOfOrder;
    if (tally.firstTick === null || tally.lastTick === null) return;
    this.#cover(tally.firstTick, tally.lastTick);
    const machine = this.#machine;
    const { sitesA } = this.#plan;
    addInto(machine.singles.subarray(0, sitesA), tally.a.singles);
    addInto(machine.singles.subarray(sitesA), tally.b.singles);
    addInto(machine.histogram, tally.histogram.counts);
    const { firstSlice: first, slices: count } = tally;
    const doublings = this.#grid.bits - Math.log2(tally.sliceTick);
    const perSlice = interleave(tally.a.singlesPerSlice, tally.b.singlesPerSlice);
    this.#singlesPerSlice.addDense(perSlice, first, count, doublings);
    machine.prompt.addTally(tally.prompt, doublings, first, count);
    machine.shifted.addTally(tally.shifted, doublings, first, count);
    if (kept) this.#keeper?.merge(kept, doublings, first, count);
    else this.dropKept();
    const head = borderFromPart(part.head);
    const tail = borderFromPart(part.tail);
    if (this.#tags === 0) {
      this.#head = head;
      this.#loadTail(tail);
    } else {
      this.#joinBorders(head, tail);
    }
    this.#tags += tally.tags;
  }

  tally(): TagTally {
    this.#machine.settle();
    const { first, count } = this.#grid;
    const { loTick, binTick } = this.#spec.histogram;
    const window = this.#spec.window ?? NO_WINDOW;
    const { sitesA, sites } = this.#plan;
    return {
      kind: 'tags',
      tickFs: this.#spec.tickFs,
      records: this.#records,
      tags: this.#tags,
      unmapped: this.#unmapped,
      firstTick: this.#grid.firstTick,
      lastTick: this.#grid.lastTick,
      outOfOrder: this.#outOfOrder,
      sliceTick: this.#grid.sliceTick,
      firstSlice: first,
      slices: count,
      a: this.#armTally(this.#spec.a, 0, sitesA, 0),
      b: this.#armTally(this.#spec.b, sitesA, sites, 1),
      histogram: { loTick, binTick, counts: this.#machine.histogram.slice() },
      window: { loTick: window.loTick, hiTick: window.hiTick, shiftsTick: [...window.shiftsTick] },
      prompt: this.#machine.prompt.tally(first, count),
      shifted: this.#machine.shifted.tally(first, count),
    };
  }

  /** A copy as plain data; its buffers may be transferred. */
  toPart(): TagPart {
    const kept = this.kept();
    return {
      part: 1,
      kind: 'tags',
      tally: this.tally(),
      head: borderToPart(this.#head),
      tail: borderToPart(this.#tail),
      ...(kept === null ? {} : { kept }),
    };
  }

  /** What was kept beside the counts; null when `TagSpec.keepPairs` did not ask, or some of it was dropped. */
  kept(): KeptPart | null {
    return this.#keeper === null || this.#keeper.isOverfull ? null : this.#keeper.toPart();
  }

  /** Bytes of the pairs kept so far; null where `kept` is. */
  keptBytes(): number | null {
    return this.#keeper === null || this.#keeper.isOverfull ? null : this.#keeper.bytes;
  }

  /** Keeps no pairs any more and forgets those at hand; the counts go on. */
  dropKept(): void {
    this.#keeper = null;
    this.#machine.dropKept();
  }

  /** Slices are 2^sliceBits ticks long by now: never shorter later. */
  get sliceBits(): number {
    return this.#grid.bits;
  }

  /** After counting: gives compiled memory back. The accumulator must not be used any more. */
  release(): void {
    this.#machine.release();
  }

  #loadTail({ refTick, markTick, tags }: TagBorder): void {
    const tail = this.#tail;
    tail.refTick = refTick;
    tail.markTick = markTick;
    tail.tags.count = 0;
    tail.tags.append(tags.time, tags.site, 0, tags.count, 0);
  }

  #cover(fromTick: bigint, toTick: bigint): void {
    const { first, count } = this.#grid;
    const doublings = this.#grid.cover(fromTick, toTick);
    if (doublings === 0) return;
    this.#keeper?.fold(doublings, first, count);
    this.#singlesPerSlice.fold(doublings, first, count);
    this.#machine.prompt.fold(doublings, first, count);
    this.#machine.shifted.fold(doublings, first, count);
  }

  #countPerSlice(start: number, stop: number): void {
    const { time } = this.#tail.tags;
    const clock = this.#grid.clockAt(this.#tail.refTick);
    const { counts } = this.#singlesPerSlice;
    for (let low = start; low < stop; ) {
      const high = firstAtLeast(time, low + 1, stop, sliceEnd(clock, time[low]!));
      const cell = 2 * slotOf(clock, time[low]!);
      const ofA = this.#machine.countArmA(low, high);
      this.#machine.countSites(low, high, cell / 2);
      counts[cell]! += ofA;
      counts[cell + 1]! += high - low - ofA;
      low = high;
    }
  }

  /** Drops the tags, sorted, that no later tag can meet. */
  #trimTail(): void {
    const { tags, markTick } = this.#tail;
    const { horizonTick, reachTick } = this.#plan;
    tags.dropBefore(firstAtLeast(tags.time, 0, tags.count, markTick - horizonTick - reachTick));
  }

  #joinBorders(head: TagBorder, tail: TagBorder): void {
    rebaseTail(this.#tail, head.refTick);
    const { time, count } = head.tags;
    this.#outOfOrder += firstAtLeast(time, 0, count, this.#tail.markTick - this.#plan.horizonTick);
    const clock = this.#grid.clockAt(this.#tail.refTick);
    this.#machine.scanBorder(this.#tail.tags.count, head.tags, 0, count, clock);
    joinHeads(this.#head, head);
    rebaseTail(this.#tail, tail.refTick);
    this.#tail.tags.append(tail.tags.time, tail.tags.site, 0, tail.tags.count, 0);
    this.#machine.sort(0, this.#tail.tags.count);
    this.#tail.markTick = Math.max(this.#tail.markTick, tail.markTick);
    this.#trimTail();
  }

  #armTally(arm: ArmSpec, start: number, stop: number, cell: 0 | 1): ArmTally {
    const { first, count } = this.#grid;
    const both = this.#singlesPerSlice.toDense(first, count);
    const singlesPerSlice = new Float64Array(count);
    for (let i = 0; i < count; i++) singlesPerSlice[i] = both[2 * i + cell]!;
    return {
      width: arm.width,
      height: arm.height,
      singles: this.#machine.singles.slice(start, stop),
      singlesPerSlice,
      masked: arm.masked.slice(),
    };
  }
}

function interleave(a: Float64Array, b: Float64Array): Float64Array {
  const both = new Float64Array(2 * a.length);
  for (let i = 0; i < a.length; i++) {
    both[2 * i] = a[i]!;
    both[2 * i + 1] = b[i]!;
  }
  return both;
}

/**
 * Compiled loops where `kernels` are at hand and no other accumulator holds them. `leastBits`: slices are at least
 * 2^leastBits ticks long, which is exact where the whole run needs that.
 */
export function createTagAccumulator(
  spec: TagSpec,
  kernels: TagWasm | null = null,
  leastBits = 0,
): TagAccumulator {
  return new TagAccumulator(spec, kernels, leastBits);
}

/** @throws Problem `newer-version` for a part of a later engine, `bad-input` for one of other arms or windows. */
export function tagAccumulatorFromPart(spec: TagSpec, part: TagPart): TagAccumulator {
  assertTagPart(spec, part);
  const accumulator = new TagAccumulator(spec, null, Math.log2(part.tally.sliceTick));
  accumulator.mergePart(part);
  return accumulator;
}
