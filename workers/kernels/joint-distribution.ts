import type { FrameWasm } from './frame-wasm';

/**
 * Full joint distribution of the n pixels of a region over consecutive frames, J(i, j) = sum_k D_k(i) D_k(j) / 2 with
 * D_k = I_k - I_(k+1) inside a run: n*n values of f32, i <= j alone, zero below. Empty: all zero.
 */
export interface JointDistribution {
  /** The next frame of the run: n values at `start`. */
  take(
    pixels: ArrayLike<number> & { subarray(from: number, to: number): ArrayLike<number> },
    start: number,
  ): void;
  /** The next frame begins a run. */
  pause(): void;
  /** J so far; valid until the next call of anything. */
  view(): Float32Array;
  /** Adds J, its rows from the diagonal on one after the other, n (n + 1) / 2 values, and starts again from zero. */
  drain(into: Float64Array): void;
}

/** Most pixels of a region: J of 64 x 64 pixels takes 64 MB. */
export const JOINT_PIXELS = 4096;

/** The compiled twin by its formula: O(n^2) a frame, sums in f32. */
export class ReadableJoint implements JointDistribution {
  readonly #n: number;
  readonly #joint: Float32Array;
  #before: Float64Array | null = null;

  constructor(n: number) {
    this.#n = n;
    this.#joint = new Float32Array(n * n);
  }

  take(pixels: ArrayLike<number>, start: number): void {
    const now = Float64Array.from({ length: this.#n }, (_, i) => pixels[start + i]!);
    const before = this.#before;
    if (before !== null) {
      for (let i = 0; i < this.#n; i++) {
        const half = 0.5 * (before[i]! - now[i]!);
        for (let j = i; j < this.#n; j++) this.#joint[i * this.#n + j]! += half * (before[j]! - now[j]!);
      }
    }
    this.#before = now;
  }

  pause(): void {
    this.#before = null;
  }

  view(): Float32Array {
    return this.#joint;
  }

  drain(into: Float64Array): void {
    addTriangle(this.#joint, this.#n, this.#n, into);
    this.#joint.fill(0);
  }
}

/** Differences summed in registers before they go to J. */
const BATCH = 128;
/** Share of lit pixels below which pairs of them are faster than the blocked product, measured. */
const SPARSE = 0.16;

/**
 * Compiled. A batch in which every frame has few lit pixels, all small whole numbers, is counted pair by pair:
 * J = sum_k [I_k I_k - sym(I_k I_(k+1))], exact while a cell stays below 2^24; others go as a blocked product of
 * difference frames in f32 (within 1e-6 of the largest value).
 */
export class CompiledJoint implements JointDistribution {
  readonly #wasm: FrameWasm;
  readonly #n: number;
  readonly #padded: number;
  readonly #limit: number;
  readonly #at: Record<
    'joint' | 'rows' | 'panels' | 'lists' | 'listBytes' | 'counts' | 'heads' | 'starts' | 'links' | 'scratch',
    number
  >;
  /** Every lit pixel of the batch holds 1. */
  #ones = true;
  #filled = 0;

  constructor(wasm: FrameWasm, n: number) {
    this.#wasm = wasm;
    this.#n = n;
    this.#padded = Math.ceil(n / 8) * 8;
    this.#limit = Math.floor(SPARSE * n) + 4;
    const from = wasm.mark;
    const listBytes = 12 * this.#limit;
    this.#at = {
      joint: wasm.place(4 * this.#padded ** 2),
      rows: wasm.place(4 * this.#padded * (BATCH + 1)),
      panels: wasm.place(4 * this.#padded * BATCH),
      lists: wasm.place((BATCH + 1) * listBytes),
      listBytes,
      counts: wasm.place(4 * (BATCH + 1)),
      heads: wasm.place(4 * this.#padded),
      starts: wasm.place(4 * (BATCH + 1)),
      links: wasm.place(4 * (BATCH + 1) * this.#limit),
      scratch: wasm.place(16),
    };
    wasm.u8(from, wasm.mark - from).fill(0);
  }

  take(
    pixels: ArrayLike<number> & { subarray(from: number, to: number): ArrayLike<number> },
    start: number,
  ): void {
    if (this.#filled > BATCH) this.#run();
    const row = this.#wasm.f32(this.#at.rows + 4 * this.#padded * this.#filled, this.#n);
    row.set(pixels.subarray(start, start + this.#n));
    this.#filled += 1;
  }

  pause(): void {
    this.#run();
    this.#filled = 0;
  }

  view(): Float32Array {
    this.#run();
    const n = this.#n;
    const padded = this.#wasm.f32(this.#at.joint, this.#padded ** 2);
    clearLower(padded, this.#padded);
    if (n === this.#padded) return padded;
    const joint = new Float32Array(n * n);
    for (let i = 0; i < n; i++) joint.set(padded.subarray(i * this.#padded, i * this.#padded + n), i * n);
    return joint;
  }

  drain(into: Float64Array): void {
    this.#run();
    const joint = this.#wasm.f32(this.#at.joint, this.#padded ** 2);
    addTriangle(joint, this.#n, this.#padded, into);
    joint.fill(0);
  }

  /** Counts what the rows hold and leaves the last frame in the first row. */
  #run(): void {
    const count = this.#filled - 1;
    if (count < 1) return;
    const { joint, rows, panels } = this.#at;
    if (this.#list(count)) this.#addPairs(count);
    else {
      this.#wasm.call.packDifferences(rows, count, this.#padded, panels);
      this.#wasm.call.addJoint(panels, count, this.#padded, joint);
    }
    const bytes = 4 * this.#padded;
    this.#wasm.u8(rows, bytes).set(this.#wasm.u8(rows + count * bytes, bytes));
    this.#filled = 1;
  }

  #list(count: number): boolean {
    const { rows, lists, listBytes, counts, scratch } = this.#at;
    const n = this.#padded;
    this.#ones = true;
    for (let k = 0; k <= count; k++) {
      const to = lists + k * listBytes;
      const found = this.#wasm.call.listLit(
        rows + 4 * n * k,
        n,
        1,
        n,
        this.#limit,
        to,
        listBytes / 3,
        scratch,
      );
      if (found < 0) return false;
      this.#wasm.i32(counts + 4 * k, 1)[0] = found;
      this.#ones = this.#ones && this.#wasm.i32(scratch, 3)[2] === 1;
    }
    return true;
  }

  #addPairs(count: number): void {
    const { joint, lists, listBytes, counts, heads, starts, links } = this.#at;
    const ones = this.#ones ? 1 : 0;
    const frames = count + 1;
    this.#wasm.call.addJointPairs(
      lists,
      listBytes,
      counts,
      frames,
      ones,
      1,
      joint,
      this.#padded,
      heads,
      starts,
      links,
    );
  }
}

/** Tiles on the diagonal are square and reach below it. */
function clearLower(joint: Float32Array, n: number): void {
  for (let i = 0; i < n; i++) joint.fill(0, i * n + Math.max(0, i - 7), i * n + i);
}

function addTriangle(joint: Float32Array, n: number, stride: number, into: Float64Array): void {
  let to = 0;
  for (let i = 0; i < n; i++) {
    for (let j = i; j < n; j++) into[to++]! += joint[i * stride + j]!;
  }
}
