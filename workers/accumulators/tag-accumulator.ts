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
import { CompiledTagMachine, canCompile } from './tag-machine-compiled';
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
    this.#keeper = spec.keepPairs ? new PairKeeper(spec, spec.keepPairs) : null;
    this.#machine =
      kernels !== null && canCompile(kernels, this.#plan)
        ? new CompiledTagMachine(kernels, spec, this.#plan, this.#keeper)
        : new ScriptTagMachine(spec, this.#plan, this.#keeper);
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
    const { latest, late } = machine.take(from, to, this.#tail.markTick);
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
    machine.sort(start, stop);
    const { time } = work;
    this.#cover(baseTick + BigInt(time[start]!), baseTick + BigInt(time[stop - 1]!));
    this.#countPerSlice(start, stop);
    this.#keeper?.takeTags(work, start, stop, baseTick, this.#grid);
    offerToHead(this.#head, work, start, stop, baseTick);
    const clock = this.#grid.clockAt(baseTick);
    machine.scanBorder(start, work, start, stop, clock);
    machine.scanWithin(start, stop, clock);
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
    this.#records += next.#records;
    this.#unmapped += next.#unmapped;
    this.#outOfOrder += next.#outOfOrder;
    const { firstTick, lastTick } = next.#grid;
    if (firstTick === null || lastTick === null) return;
    this.#cover(firstTick, lastTick);
    next.#machine.settle();
    addInto(this.#machine.singles, next.#machine.singles);
    addInto(this.#machine.histogram, next.#machine.histogram);
    const doublings = this.#grid.bits - next.#grid.bits;
    const { first, count } = next.#grid;
    this.#singlesPerSlice.addRing(next.#singlesPerSlice, doublings, first, count);
    this.#machine.prompt.addStore(next.#machine.prompt, doublings, first, count);
    this.#machine.shifted.addStore(next.#machine.shifted, doublings, first, count);
    if (next.#keeper !== null && !next.#keeper.isOverfull)
      this.#keeper?.merge(next.#keeper, next.#grid, doublings);
    else this.dropKept();
    const head = borderFromPart(borderToPart(next.#head));
    const tail = borderFromPart(borderToPart(next.#tail));
    if (this.#tags === 0) {
      this.#head = head;
      this.#loadTail(tail);
    } else {
      this.#joinBorders(head, tail);
    }
    this.#tags += next.#tags;
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
    return this.#keeper === null || this.#keeper.isOverfull ? null : this.#keeper.toPart(this.#grid);
  }

  /** Bytes of the pairs kept so far; null where `kept` is. */
  keptBytes(): number | null {
    return this.#keeper === null || this.#keeper.isOverfull ? null : this.#keeper.bytes;
  }

  /** Keeps no pairs any more and forgets those at hand; the counts go on. */
  dropKept(): void {
    this.#keeper = null;
    this.#machine.dropKeeper();
  }

  /** Fills an accumulator that has counted nothing yet. */
  load(part: TagPart): void {
    const { tally } = part;
    this.#records = tally.records;
    this.#tags = tally.tags;
    this.#unmapped = tally.unmapped;
    this.#outOfOrder = tally.outOfOrder;
    if (tally.firstTick !== null && tally.lastTick !== null)
      this.#grid.cover(tally.firstTick, tally.lastTick);
    const { first, count } = this.#grid;
    this.#machine.singles.set(tally.a.singles, 0);
    this.#machine.singles.set(tally.b.singles, this.#plan.sitesA);
    this.#singlesPerSlice.addDense(
      interleave(tally.a.singlesPerSlice, tally.b.singlesPerSlice),
      first,
      count,
    );
    this.#machine.histogram.set(tally.histogram.counts);
    this.#machine.prompt.addTally(tally.prompt, first, count);
    this.#machine.shifted.addTally(tally.shifted, first, count);
    this.#head = borderFromPart(part.head);
    this.#loadTail(borderFromPart(part.tail));
    if (part.kept) this.#keeper?.load(part.kept, this.#grid);
    else this.dropKept();
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
      counts[cell]! += ofA;
      counts[cell + 1]! += high - low - ofA;
      low = high;
    }
  }

  /** Drops the tags that no later tag can meet. */
  #trimTail(): void {
    const { tags, markTick } = this.#tail;
    const { horizonTick, reachTick } = this.#plan;
    this.#machine.sort(0, tags.count);
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
  accumulator.load(part);
  return accumulator;
}
