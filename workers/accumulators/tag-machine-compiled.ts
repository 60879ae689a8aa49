import type { TagBlock } from '../../shared/contracts/blocks';
import type { ArmSpec, TagSpec } from '../../shared/contracts/tally';
import { MOST_SPAN, PairScan, type PlacedWindow } from '../kernels/pair-scan';
import type { TagColumns } from '../kernels/tag-columns';
import { PlacedTagColumns } from '../kernels/tag-columns-wasm';
import { firstAtLeast } from '../kernels/tag-sort';
import type { TagWasm } from '../kernels/tag-wasm';
import { type CountArray, type PlaceCounts, placeInHeap } from './count-array';
import { MASKABLE_SITES, SEALED_PAIRS } from './pair-cache-keeper';
import { PlacedPairs } from './pair-cache-placed';
import { PairStore } from './pair-store';
import { SliceRing, type SlotClock, sliceEnd, slotOf } from './slice-grid';
import type { Disorder, TagMachine } from './tag-machine';
import type { TagPlan } from './tag-plan';

/** Tags a turn: with their times and sites they fit the second-level cache. */
const PIECE = 2 ** 14;
/** Turns between two foldings of the 32-bit counters: in between no counter can pass 2^32 in any reasonable time. */
const TURNS = 64;

/** Modules whose memory an accumulator holds: there is one at a time, because memory is given back in reverse. */
const busy = new WeakSet<TagWasm>();

/** Pixels of both arms of a pair share 32 bits. */
const MOST_PIXELS = 2 ** 16;

/** Whether the compiled loops can serve: nobody else holds the module, and delays and pixels are within their range. */
export function canCompile(wasm: TagWasm, { a, b }: TagSpec, { minTauTick, maxTauTick }: TagPlan): boolean {
  return (
    !busy.has(wasm) &&
    a.width * a.height <= MOST_PIXELS &&
    b.width * b.height <= MOST_PIXELS &&
    maxTauTick - minTauTick <= MOST_SPAN
  );
}

/** @throws RangeError where the machine has no more memory; what was placed by then is given back. */
export function compileMachine(wasm: TagWasm, spec: TagSpec, plan: TagPlan): CompiledTagMachine {
  const { mark } = wasm;
  try {
    return new CompiledTagMachine(wasm, spec, plan);
  } catch (thrown) {
    wasm.release(mark);
    throw thrown;
  }
}

/**
 * The loops compiled, on columns in the module's memory. Blocks that lie there already are not copied. Memory: the
 * counters of the two `PairStore`s, about 1 MiB of tables, 12 bytes a tag of the tail and a piece, and 16 MiB where pairs
 * are kept.
 */
class CompiledTagMachine implements TagMachine {
  readonly pieceTags = PIECE;
  readonly work: PlacedTagColumns;
  readonly prompt: PairStore;
  readonly shifted: PairStore;
  readonly singles: Float64Array;
  readonly histogram: Float64Array;
  readonly #wasm: TagWasm;
  readonly #mark: number;
  readonly #plan: TagPlan;
  /** null when nothing is to be found in pairs. */
  readonly #scan: PairScan | null;
  readonly #scratch: PlacedTagColumns;
  readonly #tableAt: number;
  readonly #singlesAt: number;
  readonly #orderAt: number;
  readonly #copyAt: number;
  found: PlacedPairs | null = null;
  sitesPerSlice: SliceRing | null = null;
  #sitesPerSliceAt = 0;
  #source: TagBlock | { deltaAt: number; channelAt: number } = { deltaAt: 0, channelAt: 0 };
  #turns = 0;

  constructor(wasm: TagWasm, spec: TagSpec, plan: TagPlan) {
    this.#wasm = wasm;
    this.#mark = wasm.mark;
    this.#plan = plan;
    this.singles = new Float64Array(plan.sites);
    this.histogram = new Float64Array(spec.histogram.bins);
    const windows: PlacedWindow[] = [];
    if (spec.window === null) {
      this.prompt = new PairStore(spec.a, spec.b, false, placeInHeap);
      this.shifted = new PairStore(spec.a, spec.b, false, placeInHeap);
    } else {
      const tablesAt = placePixels(wasm, spec);
      const prompt = placeStore(wasm, spec, tablesAt);
      const shifted = placeStore(wasm, spec, tablesAt);
      this.prompt = prompt.store;
      this.shifted = shifted.store;
      const { loTick, hiTick, shiftsTick } = spec.window;
      windows.push({ loTick, hiTick, countersAt: prompt.countersAt });
      for (const shift of shiftsTick) {
        windows.push({ loTick: loTick + shift, hiTick: hiTick + shift, countersAt: shifted.countersAt });
      }
    }
    const room = spec.keepPairs ? SEALED_PAIRS : 0;
    this.#scan =
      plan.minTauTick <= plan.maxTauTick
        ? new PairScan(wasm, plan, spec.histogram.bins, windows, room)
        : null;
    if (spec.keepPairs && this.#scan !== null) {
      this.found = new PlacedPairs(wasm, this.#scan, spec.keepPairs);
      if (plan.sites <= MASKABLE_SITES) {
        this.sitesPerSlice = new SliceRing(plan.sites, (length) => {
          const { at, counters } = placeCounters(wasm, length);
          this.#sitesPerSliceAt = at;
          return counters;
        });
      }
    }
    this.#singlesAt = wasm.place(4 * (plan.sites + 1));
    this.#tableAt = placeChannels(wasm, plan, this.#singlesAt);
    this.#orderAt = wasm.place(24);
    this.#copyAt = wasm.place(10 * PIECE);
    this.#scratch = new PlacedTagColumns(wasm, PIECE);
    this.work = new PlacedTagColumns(wasm, 8 * PIECE);
    wasm.u32(this.#singlesAt, plan.sites + 1).fill(0);
    // Last: where the machine has no room for all this, nobody holds the module.
    busy.add(wasm);
  }

  begin(block: TagBlock): void {
    const { deltaTick, channel } = block;
    // Addresses instead of views: room made for the tags may grow the memory, and the views would end.
    this.#source =
      deltaTick.buffer === this.#wasm.memory.buffer && channel.buffer === deltaTick.buffer
        ? { deltaAt: deltaTick.byteOffset, channelAt: channel.byteOffset }
        : block;
  }

  take(from: number, to: number, latest: number): Disorder {
    const wasm = this.#wasm;
    const { work } = this;
    const count = to - from;
    // The kernels read up to four tags past the last.
    work.reserve(work.count + count + 4);
    let deltaAt = this.#copyAt;
    let channelAt = this.#copyAt + 8 * PIECE;
    const source = this.#source;
    if ('deltaAt' in source) {
      deltaAt = source.deltaAt + 8 * from;
      channelAt = source.channelAt + 2 * from;
    } else {
      wasm.f64(deltaAt, count).set(source.deltaTick.subarray(from, to));
      wasm.u16(channelAt, count).set(source.channel.subarray(from, to));
    }
    const timeAt = work.timeAt + 8 * work.count;
    const siteAt = work.siteAt + 4 * work.count;
    const kept = wasm.call.takeTags(deltaAt, channelAt, count, this.#tableAt, timeAt, siteAt);
    wasm.call.orderOf(timeAt, kept, latest, this.#plan.horizonTick, this.#orderAt);
    work.count += kept;
    const order = wasm.f64(this.#orderAt, 3);
    this.#turns += 1;
    if (this.#turns >= TURNS) this.#widen();
    return { latest: order[0]!, late: order[1]!, isSorted: order[2] === 1 };
  }

  sort(start: number, stop: number): void {
    const { work } = this;
    const { call } = this.#wasm;
    const count = stop - start;
    if (count < 2 || call.isSorted(work.timeAt + 8 * start, count) !== 0) return;
    const scratch = this.#scratch;
    scratch.reserve(count);
    call.sortTags(work.timeAt + 8 * start, work.siteAt + 4 * start, count, scratch.timeAt, scratch.siteAt);
  }

  countArmA(start: number, stop: number): number {
    return this.#wasm.call.countBelow(this.work.siteAt + 4 * start, stop - start, this.#plan.sitesA);
  }

  countSites(start: number, stop: number, slot: number): void {
    if (this.sitesPerSlice === null) return;
    const rowAt = this.#sitesPerSliceAt + 8 * slot * this.sitesPerSlice.cells;
    this.#wasm.call.countSites(this.work.siteAt + 4 * start, stop - start, rowAt);
  }

  /** Slice by slice, so that all pairs inside a slice are known to be of that one. */
  scanWithin(start: number, stop: number, clock: SlotClock): void {
    const scan = this.#scan;
    if (scan === null) return;
    const { timeAt, siteAt } = this.work;
    const { call } = this.#wasm;
    for (let low = start; low < stop; ) {
      // Looked at anew each turn: sealing pairs may move the memory.
      const { time } = this.work;
      const high = firstAtLeast(time, low + 1, stop, sliceEnd(clock, time[low]!));
      const slot = slotOf(clock, time[low]!);
      const left = { timeAt: timeAt + 8 * start, siteAt: siteAt + 4 * start };
      const right = { timeAt: timeAt + 8 * low, siteAt: siteAt + 4 * low };
      this.#scanBetween(scan, left, low - start, right, high - low, clock);
      scan.setSlot(slot);
      while (call.scanPairs(scan.at, timeAt, siteAt, low, high) !== 0) this.#drain(scan);
      this.#drain(scan);
      low = high;
    }
  }

  scanBorder(workStop: number, tags: TagColumns, start: number, stop: number, clock: SlotClock): void {
    if (this.#scan === null || workStop === 0 || start >= stop) return;
    const right = this.#placed(tags, start, stop);
    this.#scanBetween(this.#scan, this.work, workStop, right, stop - start, clock);
  }

  #scanBetween(
    scan: PairScan,
    left: { timeAt: number; siteAt: number },
    leftCount: number,
    right: { timeAt: number; siteAt: number },
    rightCount: number,
    clock: SlotClock,
  ): void {
    const { call } = this.#wasm;
    const { timeAt, siteAt } = left;
    scan.setClock(clock.slot, clock.offsetTick, clock.perTick);
    while (
      call.scanBetween(scan.at, timeAt, siteAt, leftCount, right.timeAt, right.siteAt, rightCount) !== 0
    ) {
      this.#drain(scan);
    }
    this.#drain(scan);
  }

  settle(): void {
    this.#widen();
    this.prompt.settleLags();
    this.shifted.settleLags();
  }

  /** Moves the 32-bit counts to where there is room for more. */
  #widen(): void {
    this.#turns = 0;
    this.#scan?.takeHistogram(this.histogram);
    const counts = this.#wasm.u32(this.#singlesAt, this.singles.length + 1);
    for (let i = 0; i < this.singles.length; i++) this.singles[i]! += counts[i + 1]!;
    counts.fill(0);
  }

  dropKept(): void {
    this.found?.clear();
    this.found = null;
    this.sitesPerSlice = null;
  }

  release(): void {
    this.#wasm.release(this.#mark);
    busy.delete(this.#wasm);
  }

  #placed(tags: TagColumns, start: number, stop: number): { timeAt: number; siteAt: number } {
    if (tags === this.work) {
      return { timeAt: this.work.timeAt + 8 * start, siteAt: this.work.siteAt + 4 * start };
    }
    const scratch = this.#scratch;
    scratch.count = 0;
    scratch.append(tags.time, tags.site, start, stop, 0);
    const { timeAt, siteAt } = scratch;
    scratch.count = 0;
    return { timeAt, siteAt };
  }

  /** Counts the pairs at hand; they stay there as long as somebody keeps them. */
  #drain(scan: PairScan): void {
    const { pairs, slot } = scan.uncounted;
    if (pairs === 0) return;
    this.#wasm.call.countPairs(scan.at);
    if (this.found === null) {
      scan.clear();
    } else {
      this.found.add(slot, pairs);
      this.found.onGrowth();
    }
  }
}

/** The table of `takeTags`: of each channel the delay, the site and where it is counted. */
function placeChannels(wasm: TagWasm, plan: TagPlan, singlesAt: number): number {
  const { siteOfChannel, delayOfChannel } = plan;
  const entries = siteOfChannel.length;
  const at = wasm.place(16 * entries);
  const delays = wasm.f64(at, 2 * entries);
  const sites = wasm.i32(at, 4 * entries);
  const write = (channel: number, site: number, delay: number): void => {
    delays[2 * channel] = delay;
    sites[4 * channel + 2] = site;
    sites[4 * channel + 3] = singlesAt + 4 * (site + 1);
  };
  // Copies of the first entry, twice as many at a time: this is done for every chunk.
  write(0, -1, 0);
  for (let done = 1; done < entries; done *= 2)
    sites.copyWithin(4 * done, 0, 4 * Math.min(done, entries - done));
  for (const channel of plan.channels) write(channel, siteOfChannel[channel]!, delayOfChannel[channel]!);
  return at;
}

function placeCounters(wasm: TagWasm, length: number): { at: number; counters: CountArray } {
  const at = wasm.place(8 * length);
  wasm.f64(at, length).fill(0);
  const counters = {
    get values() {
      return wasm.f64(at, length);
    },
  };
  return { at, counters };
}

/** A store whose counters lie in the module, and the settings that tell the kernels where. */
function placeStore(
  wasm: TagWasm,
  { a, b }: TagSpec,
  tablesAt: readonly number[],
): { store: PairStore; countersAt: number } {
  const placed: number[] = [];
  const place: PlaceCounts = (length) => {
    const { at, counters } = placeCounters(wasm, length);
    placed.push(at);
    return counters;
  };
  const store = new PairStore(a, b, true, place);
  const countersAt = wasm.place(64);
  const matrixAt = placed[7] ?? 0;
  wasm
    .i32(countersAt, 16)
    .set([...placed.slice(0, 7), matrixAt, ...tablesAt, a.width, a.height, b.width, b.height]);
  return { store, countersAt };
}

/** Columns and rows of the pixels of both arms: addresses of xA, yA, xB, yB. */
function placePixels(wasm: TagWasm, { a, b }: TagSpec): number[] {
  return [a, b].flatMap((arm) => {
    const tables = pixelTables(arm);
    return tables.map((table) => {
      const at = wasm.place(table.byteLength);
      wasm.i32(at, table.length).set(table);
      return at;
    });
  });
}

function pixelTables({ width, height }: ArmSpec): [Int32Array, Int32Array] {
  const x = Int32Array.from({ length: width * height }, (_, pixel) => pixel % width);
  const y = Int32Array.from({ length: width * height }, (_, pixel) => Math.floor(pixel / width));
  return [x, y];
}
