import type { TagColumns } from './tag-columns';
import type { TagWasm } from './tag-wasm';

/**
 * Columns of tags in a module's memory. Times and sites are views made anew at each look, because placing anything may
 * move them. Dropping the first tags moves only where the columns begin; they are put back when room runs out.
 */
export class PlacedTagColumns implements TagColumns {
  readonly #wasm: TagWasm;
  #timeAt = 0;
  #siteAt = 0;
  #room = 0;
  #origin = 0;
  count = 0;

  constructor(wasm: TagWasm, room: number) {
    this.#wasm = wasm;
    this.reserve(room);
  }

  get timeAt(): number {
    return this.#timeAt + 8 * this.#origin;
  }
  get siteAt(): number {
    return this.#siteAt + 4 * this.#origin;
  }
  get time(): Float64Array {
    return this.#wasm.f64(this.timeAt, this.#room - this.#origin);
  }
  get site(): Int32Array {
    return this.#wasm.i32(this.siteAt, this.#room - this.#origin);
  }

  reserve(capacity: number): void {
    if (this.#origin + capacity <= this.#room) return;
    const from = { time: this.timeAt, site: this.siteAt };
    this.#origin = 0;
    if (2 * capacity > this.#room) {
      this.#room = Math.max(4 * capacity, 2 * this.#room);
      this.#timeAt = this.#wasm.place(8 * this.#room);
      this.#siteAt = this.#wasm.place(4 * this.#room);
    }
    const bytes = this.#wasm.u8(0, this.#wasm.memory.buffer.byteLength);
    bytes.copyWithin(this.#timeAt, from.time, from.time + 8 * this.count);
    bytes.copyWithin(this.#siteAt, from.site, from.site + 4 * this.count);
  }

  append(time: Float64Array, site: Int32Array, start: number, stop: number, shiftTick: number): void {
    this.reserve(this.count + stop - start);
    const toTime = this.time;
    const toSite = this.site;
    for (let i = start, at = this.count; i < stop; i++, at++) {
      toTime[at] = time[i]! + shiftTick;
      toSite[at] = site[i]!;
    }
    this.count += stop - start;
  }

  shift(ticks: number): void {
    if (ticks === 0) return;
    const { time } = this;
    for (let i = 0; i < this.count; i++) time[i] = time[i]! + ticks;
  }

  dropBefore(start: number): void {
    this.#origin += start;
    this.count -= start;
  }
}
