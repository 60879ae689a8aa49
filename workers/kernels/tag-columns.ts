/**
 * Growable columns of tags: whole ticks after some reference, and the site that fired. Sites number the pixels of both
 * arms in one row: arm A first (0 to nA - 1), then arm B (nA to nA + nB - 1), so one comparison tells the arm.
 */
export class TagColumns {
  time: Float64Array;
  site: Int32Array;
  count = 0;

  constructor(capacity = 1024) {
    this.time = new Float64Array(capacity);
    this.site = new Int32Array(capacity);
  }

  /** Makes room for `capacity` tags; what is there stays. */
  reserve(capacity: number): void {
    if (capacity <= this.time.length) return;
    const size = Math.max(capacity, this.time.length * 2);
    const time = new Float64Array(size);
    const site = new Int32Array(size);
    time.set(this.time.subarray(0, this.count));
    site.set(this.site.subarray(0, this.count));
    this.time = time;
    this.site = site;
  }

  /** Appends a copy of the given tags, `shiftTick` added to their times. */
  append(time: Float64Array, site: Int32Array, start: number, stop: number, shiftTick: number): void {
    this.reserve(this.count + stop - start);
    let at = this.count;
    for (let i = start; i < stop; i++) {
      this.time[at] = time[i]! + shiftTick;
      this.site[at] = site[i]!;
      at += 1;
    }
    this.count = at;
  }

  /** Adds to every time: the same tags, seen from another reference. */
  shift(ticks: number): void {
    if (ticks === 0) return;
    for (let i = 0; i < this.count; i++) this.time[i] = this.time[i]! + ticks;
  }

  /** Keeps only the tags from index `start` on. */
  dropBefore(start: number): void {
    if (start === 0) return;
    this.time.copyWithin(0, start, this.count);
    this.site.copyWithin(0, start, this.count);
    this.count -= start;
  }
}
