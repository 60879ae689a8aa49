import type { TagColumns } from './tag-columns';

/**
 * Dead time put on afterwards: drops, in place, sorted tags of [0, count) that come less than `deadTick` after the last
 * kept one of their site (not of any dropped one: a non-paralysable detector). `lastTick` holds, per site, the time of
 * that tag against the same reference, -Infinity before the first, and is brought up to date. Returns how many stay.
 * O(tags). Source: Knoll, Radiation Detection and Measurement, on models of dead time (from memory).
 */
export function dropDead(tags: TagColumns, deadTick: number, lastTick: Float64Array): number {
  const { time, site, count } = tags;
  let kept = 0;
  for (let i = 0; i < count; i++) {
    const t = time[i]!;
    const s = site[i]!;
    if (!(t - lastTick[s]! >= deadTick)) continue;
    lastTick[s] = t;
    time[kept] = t;
    site[kept] = s;
    kept += 1;
  }
  tags.count = kept;
  return kept;
}
