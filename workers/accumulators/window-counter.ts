import type { ArmSpec, TagSpec } from '../../shared/contracts/tally';
import { createPairColumns } from '../kernels/pair-counts';
import type { PairSink } from '../kernels/tag-scan';
import type { PairColumnsKept } from './pair-cache-store';
import { PairStore } from './pair-store';
import { type SlotClock, slotOf } from './slice-grid';

const CAPACITY = 1 << 15;

/**
 * Takes candidate pairs from the scans, sorts them into the prompt and the shifted windows and counts them there.
 * A tau inside several shifted windows counts in each.
 */
export class WindowCounter implements PairSink {
  readonly capacity: number;
  readonly timeA: Float64Array;
  readonly tau: Float64Array;
  readonly pixelA: Int32Array;
  readonly pixelB: Int32Array;
  readonly prompt: PairStore;
  readonly shifted: PairStore;
  readonly #window: NonNullable<TagSpec['window']> | null;
  readonly #chosen: ReturnType<typeof createPairColumns>;
  readonly #a: PixelTable;
  readonly #b: PixelTable;
  #kept: PairColumnsKept | null;
  #clock: SlotClock = { slot: 0, offsetTick: 0, perTick: 1 };

  /** All candidates go to `kept` as well. */
  constructor(spec: TagSpec, kept: PairColumnsKept | null = null) {
    const enabled = spec.window !== null;
    this.#kept = kept;
    this.capacity = enabled || kept !== null ? CAPACITY : 1;
    this.timeA = new Float64Array(this.capacity);
    this.tau = new Float64Array(this.capacity);
    this.pixelA = new Int32Array(this.capacity);
    this.pixelB = new Int32Array(this.capacity);
    this.prompt = new PairStore(spec.a, spec.b, enabled);
    this.shifted = new PairStore(spec.a, spec.b, enabled);
    this.#window = spec.window;
    this.#chosen = createPairColumns(this.capacity);
    this.#a = createPixelTable(spec.a);
    this.#b = createPixelTable(spec.b);
  }

  /** To be called before every scan: where the slices are for the scanned times. */
  begin(clock: SlotClock): void {
    this.#clock = clock;
  }

  dropKept(): void {
    this.#kept = null;
  }

  drain(count: number): void {
    if (count === 0) return;
    this.#kept?.add(this, count, this.#clock);
    if (this.#window === null) return;
    const { loTick, hiTick, shiftsTick } = this.#window;
    this.prompt.add(this.#chosen, this.#choose(count, loTick, hiTick));
    for (const shift of shiftsTick) {
      this.shifted.add(this.#chosen, this.#choose(count, loTick + shift, hiTick + shift));
    }
  }

  /** Copies the candidates with lo <= tau <= hi to the chosen columns; returns how many. */
  #choose(count: number, loTick: number, hiTick: number): number {
    const { tau, timeA, pixelA, pixelB } = this;
    const to = this.#chosen;
    const a = this.#a;
    const b = this.#b;
    const clock = this.#clock;
    let chosen = 0;
    for (let i = 0; i < count; i++) {
      const t = tau[i]!;
      if (!(t >= loTick && t <= hiTick)) continue;
      const pA = pixelA[i]!;
      const pB = pixelB[i]!;
      to.slot[chosen] = slotOf(clock, timeA[i]!);
      to.pixelA[chosen] = pA;
      to.pixelB[chosen] = pB;
      to.xA[chosen] = a.x[pA]!;
      to.yA[chosen] = a.y[pA]!;
      to.xB[chosen] = b.x[pB]!;
      to.yB[chosen] = b.y[pB]!;
      chosen += 1;
    }
    return chosen;
  }
}

interface PixelTable {
  x: Int32Array;
  y: Int32Array;
}

function createPixelTable(arm: ArmSpec): PixelTable {
  const pixels = arm.width * arm.height;
  const x = new Int32Array(pixels);
  const y = new Int32Array(pixels);
  for (let p = 0; p < pixels; p++) {
    x[p] = p % arm.width;
    y[p] = Math.floor(p / arm.width);
  }
  return { x, y };
}
