import type { TagBlock } from '../../shared/contracts/blocks';
import type { ArmSpec, ArmTally, TagSpec, TagTally } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { TagColumns } from '../kernels/tag-columns';
import { scanBetween, scanHistogram, scanWindows } from '../kernels/tag-scan';
import { firstAtLeast, sortTags } from '../kernels/tag-sort';
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
import { assertTagPart, NO_WINDOW, type TagPart } from './tag-part';
import { planTags, type TagPlan } from './tag-plan';
import { WindowCounter } from './window-counter';

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
  readonly #singles: Float64Array;
  /** Cells: arm A, arm B. */
  readonly #singlesPerSlice = new SliceRing(2);
  readonly #histogram: Float64Array;
  readonly #windows: WindowCounter;
  readonly #scratch = new TagColumns();
  /** null when no pairs are to be kept, or no longer all of them are. */
  #keeper: PairKeeper | null;
  #head = createBorder();
  #tail = createBorder();
  #records = 0;
  #tags = 0;
  #unmapped = 0;
  #outOfOrder = 0;

  constructor(spec: TagSpec) {
    this.#spec = spec;
    this.#plan = planTags(spec);
    this.#grid = new SliceGrid(spec.tickFs);
    this.#singles = new Float64Array(this.#plan.sites);
    this.#histogram = new Float64Array(spec.histogram.bins);
    this.#keeper = spec.keepPairs ? new PairKeeper(spec, spec.keepPairs) : null;
    this.#windows = new WindowCounter(spec, this.#keeper);
  }

  /** Takes the next block of this range, whatever its length. */
  push(block: TagBlock): void {
    if (block.kind !== 'tags') {
      throw new Problem('bad-input', 'Time tags were expected but frames were found; choose a tag file.');
    }
    this.#records += block.records;
    const work = this.#tail.tags;
    rebaseTail(this.#tail, block.baseTick);
    const start = work.count;
    this.#take(block);
    const stop = work.count;
    if (stop === start) return;
    if (this.#tags === 0) {
      this.#head.refTick = block.baseTick + BigInt(work.time[start]!);
      this.#head.markTick = this.#plan.horizonTick + this.#plan.reachTick;
    }
    this.#tags += stop - start;
    sortTags(work, start, stop, this.#scratch);
    this.#cover(block.baseTick + BigInt(work.time[start]!), block.baseTick + BigInt(work.time[stop - 1]!));
    this.#countPerSlice(start, stop);
    this.#keeper?.takeTags(work, start, stop, block.baseTick, this.#grid);
    offerToHead(this.#head, work, start, stop, block.baseTick);
    this.#pairBetween(this.#tail, start, work, start, stop);
    this.#pairWithin(start, stop);
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
    addInto(this.#singles, next.#singles);
    addInto(this.#histogram, next.#histogram);
    const doublings = this.#grid.bits - next.#grid.bits;
    const { first, count } = next.#grid;
    this.#singlesPerSlice.addRing(next.#singlesPerSlice, doublings, first, count);
    this.#windows.prompt.addStore(next.#windows.prompt, doublings, first, count);
    this.#windows.shifted.addStore(next.#windows.shifted, doublings, first, count);
    if (next.#keeper !== null) this.#keeper?.merge(next.#keeper, next.#grid, doublings);
    else this.dropKept();
    const head = borderFromPart(borderToPart(next.#head));
    const tail = borderFromPart(borderToPart(next.#tail));
    if (this.#tags === 0) {
      this.#head = head;
      this.#tail = tail;
    } else {
      this.#joinBorders(head, tail);
    }
    this.#tags += next.#tags;
  }

  tally(): TagTally {
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
      histogram: { loTick, binTick, counts: this.#histogram.slice() },
      window: { loTick: window.loTick, hiTick: window.hiTick, shiftsTick: [...window.shiftsTick] },
      prompt: this.#windows.prompt.tally(first, count),
      shifted: this.#windows.shifted.tally(first, count),
    };
  }

  /** A copy as plain data; its buffers may be transferred. */
  toPart(): TagPart {
    return {
      part: 1,
      kind: 'tags',
      tally: this.tally(),
      head: borderToPart(this.#head),
      tail: borderToPart(this.#tail),
      ...(this.#keeper === null ? {} : { kept: this.#keeper.toPart(this.#grid) }),
    };
  }

  /** What was kept beside the counts; null when `TagSpec.keepPairs` did not ask, or some of it was dropped. */
  kept(): KeptPart | null {
    return this.#keeper?.toPart(this.#grid) ?? null;
  }

  /** Keeps no pairs any more and forgets those at hand; the counts go on. */
  dropKept(): void {
    this.#keeper = null;
    this.#windows.dropKeeper();
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
    this.#singles.set(tally.a.singles, 0);
    this.#singles.set(tally.b.singles, this.#plan.sitesA);
    this.#singlesPerSlice.addDense(
      interleave(tally.a.singlesPerSlice, tally.b.singlesPerSlice),
      first,
      count,
    );
    this.#histogram.set(tally.histogram.counts);
    this.#windows.prompt.addTally(tally.prompt, first, count);
    this.#windows.shifted.addTally(tally.shifted, first, count);
    this.#head = borderFromPart(part.head);
    this.#tail = borderFromPart(part.tail);
    if (part.kept) this.#keeper?.load(part.kept, this.#grid);
    else this.dropKept();
  }

  /** Appends the kept tags of a block to the tail's columns, delays applied, and counts singles and disorder. */
  #take(block: TagBlock): void {
    const { siteOfChannel, delayOfChannel, horizonTick } = this.#plan;
    const { deltaTick, channel, count } = block;
    const singles = this.#singles;
    const work = this.#tail.tags;
    work.reserve(work.count + count);
    const { time, site } = work;
    let at = work.count;
    let latest = this.#tail.markTick;
    let late = 0;
    for (let i = 0; i < count; i++) {
      const c = channel[i]!;
      const s = siteOfChannel[c]!;
      if (s < 0) continue;
      const t = deltaTick[i]! + delayOfChannel[c]!;
      time[at] = t;
      site[at] = s;
      at += 1;
      singles[s]! += 1;
      if (t > latest) latest = t;
      else if (latest - t > horizonTick) late += 1;
    }
    this.#unmapped += count - (at - work.count);
    this.#outOfOrder += late;
    this.#tail.markTick = latest;
    work.count = at;
  }

  #cover(fromTick: bigint, toTick: bigint): void {
    const { first, count } = this.#grid;
    const doublings = this.#grid.cover(fromTick, toTick);
    if (doublings === 0) return;
    this.#keeper?.fold(doublings, first, count);
    this.#singlesPerSlice.fold(doublings, first, count);
    this.#windows.prompt.fold(doublings, first, count);
    this.#windows.shifted.fold(doublings, first, count);
  }

  #countPerSlice(start: number, stop: number): void {
    const { time, site } = this.#tail.tags;
    const { sitesA } = this.#plan;
    const clock = this.#grid.clockAt(this.#tail.refTick);
    const { counts } = this.#singlesPerSlice;
    for (let low = start; low < stop; ) {
      const high = firstAtLeast(time, low + 1, stop, sliceEnd(clock, time[low]!));
      const cell = 2 * slotOf(clock, time[low]!);
      let ofA = 0;
      // The sign bit instead of a comparison: arms alternate at random and a branch would be mispredicted.
      for (let i = low; i < high; i++) ofA += (site[i]! - sitesA) >>> 31;
      counts[cell]! += ofA;
      counts[cell + 1]! += high - low - ofA;
      low = high;
    }
  }

  #pairWithin(start: number, stop: number): void {
    const { tags, refTick } = this.#tail;
    if (this.#spec.window === null && this.#keeper === null) {
      scanHistogram(tags, start, stop, this.#plan, this.#histogram);
      return;
    }
    this.#windows.begin(this.#grid, refTick);
    scanWindows(tags, start, stop, this.#plan, this.#histogram, this.#windows);
  }

  /** Pairs of a tail's first `tailStop` tags with tags [start, stop) on the same reference. */
  #pairBetween(tail: TagBorder, tailStop: number, tags: TagColumns, start: number, stop: number): void {
    this.#windows.begin(this.#grid, tail.refTick);
    scanBetween(tail.tags, tailStop, tags, start, stop, this.#plan, this.#histogram, this.#windows);
  }

  /** Drops the tags that no later tag can meet. */
  #trimTail(): void {
    const { tags, markTick } = this.#tail;
    const { horizonTick, reachTick } = this.#plan;
    sortTags(tags, 0, tags.count, this.#scratch);
    tags.dropBefore(firstAtLeast(tags.time, 0, tags.count, markTick - horizonTick - reachTick));
  }

  #joinBorders(head: TagBorder, tail: TagBorder): void {
    rebaseTail(this.#tail, head.refTick);
    const { time, count } = head.tags;
    this.#outOfOrder += firstAtLeast(time, 0, count, this.#tail.markTick - this.#plan.horizonTick);
    this.#pairBetween(this.#tail, this.#tail.tags.count, head.tags, 0, count);
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
      singles: this.#singles.slice(start, stop),
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

export function createTagAccumulator(spec: TagSpec, _kernels: TagWasm | null = null): TagAccumulator {
  return new TagAccumulator(spec);
}

/** @throws Problem `newer-version` for a part of a later engine, `bad-input` for one of other arms or windows. */
export function tagAccumulatorFromPart(spec: TagSpec, part: TagPart): TagAccumulator {
  assertTagPart(spec, part);
  const accumulator = new TagAccumulator(spec);
  accumulator.load(part);
  return accumulator;
}
