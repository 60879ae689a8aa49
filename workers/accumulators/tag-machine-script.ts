import type { TagBlock } from '../../shared/contracts/blocks';
import type { TagSpec } from '../../shared/contracts/tally';
import { TagColumns } from '../kernels/tag-columns';
import { scanBetween, scanHistogram, scanWindows } from '../kernels/tag-scan';
import { sortTags } from '../kernels/tag-sort';
import { MASKABLE_SITES } from './pair-cache-keeper';
import { PairColumnsKept } from './pair-cache-store';
import { SliceRing, type SlotClock } from './slice-grid';
import type { Disorder, TagMachine } from './tag-machine';
import type { TagPlan } from './tag-plan';
import { WindowCounter } from './window-counter';

/** The loops in TypeScript: reference of the compiled ones, and what serves where those cannot be had. */
export class ScriptTagMachine implements TagMachine {
  readonly pieceTags = Number.POSITIVE_INFINITY;
  readonly work = new TagColumns();
  readonly singles: Float64Array;
  readonly histogram: Float64Array;
  found: PairColumnsKept | null;
  sitesPerSlice: SliceRing | null;
  readonly #plan: TagPlan;
  readonly #windows: WindowCounter;
  readonly #scratch = new TagColumns();
  #block: TagBlock | null = null;
  #wantsPairs: boolean;
  readonly #hasWindow: boolean;

  constructor(spec: TagSpec, plan: TagPlan) {
    this.#plan = plan;
    this.found = spec.keepPairs ? new PairColumnsKept(spec.keepPairs) : null;
    this.sitesPerSlice = spec.keepPairs && plan.sites <= MASKABLE_SITES ? new SliceRing(plan.sites) : null;
    this.#windows = new WindowCounter(spec, this.found);
    this.#hasWindow = spec.window !== null;
    this.#wantsPairs = this.#hasWindow || this.found !== null;
    this.singles = new Float64Array(plan.sites);
    this.histogram = new Float64Array(spec.histogram.bins);
  }

  get prompt() {
    return this.#windows.prompt;
  }
  get shifted() {
    return this.#windows.shifted;
  }

  begin(block: TagBlock): void {
    this.#block = block;
  }

  take(from: number, to: number, latest: number): Disorder {
    const block = this.#block;
    if (block === null) return { latest, late: 0, isSorted: true };
    const { siteOfChannel, delayOfChannel, horizonTick } = this.#plan;
    const { deltaTick, channel } = block;
    const { work, singles } = this;
    work.reserve(work.count + to - from);
    const { time, site } = work;
    let at = work.count;
    let late = 0;
    for (let i = from; i < to; i++) {
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
    work.count = at;
    return { latest, late, isSorted: false };
  }

  sort(start: number, stop: number): void {
    sortTags(this.work, start, stop, this.#scratch);
  }

  countArmA(start: number, stop: number): number {
    const { site } = this.work;
    const { sitesA } = this.#plan;
    let ofA = 0;
    // The sign bit instead of a comparison: arms alternate at random and a branch would be mispredicted.
    for (let i = start; i < stop; i++) ofA += (site[i]! - sitesA) >>> 31;
    return ofA;
  }

  countSites(start: number, stop: number, slot: number): void {
    if (this.sitesPerSlice === null) return;
    const { counts, cells } = this.sitesPerSlice;
    const { site } = this.work;
    const row = slot * cells;
    for (let i = start; i < stop; i++) counts[row + site[i]!]! += 1;
  }

  scanWithin(start: number, stop: number, clock: SlotClock): void {
    if (!this.#wantsPairs) {
      scanHistogram(this.work, start, stop, this.#plan, this.histogram);
      return;
    }
    this.#windows.begin(clock);
    scanWindows(this.work, start, stop, this.#plan, this.histogram, this.#windows);
  }

  scanBorder(workStop: number, tags: TagColumns, start: number, stop: number, clock: SlotClock): void {
    this.#windows.begin(clock);
    scanBetween(this.work, workStop, tags, start, stop, this.#plan, this.histogram, this.#windows);
  }

  settle(): void {}

  dropKept(): void {
    this.found = null;
    this.sitesPerSlice = null;
    this.#windows.dropKept();
    this.#wantsPairs = this.#hasWindow;
  }

  release(): void {}
}
