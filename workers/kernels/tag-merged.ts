import { HistogramScan } from './histogram-scan';
import { TagColumns } from './tag-columns';
import { rangeWithin, type TickWindow } from './tag-lists';
import { counted, lent } from './tag-lists-wasm';
import { scanHistogram } from './tag-scan';
import type { TagWasm } from './tag-wasm';

/** One stream of both arms in time order: whole ticks, and the site that fired; sites below `sitesA` are arm A. */
export interface MergedTags {
  time: Float64Array;
  site: Int32Array;
  sitesA: number;
}

/**
 * Coincidences of one merged stream, each pair once, tau = t_B - t_A; all add to the caller's array.
 * O(tags + pairs within reach): from each tag forward until nothing later can meet it. Two implementations of one
 * meaning, both here; the accumulators use the compiled one on columns that are in its memory already.
 */
export interface MergedScans {
  /** out[floor((tau - loTick) / binTick)] += 1 for 0 <= tau - loTick < out.length * binTick. */
  histogram(tags: MergedTags, loTick: number, binTick: number, out: Float64Array): void;
  /** out[(siteB - sitesA) * sitesA + siteA] += 1 for tau in the window. */
  matrix(tags: MergedTags, window: TickWindow, out: Float64Array): void;
}

export const scriptMergedScans: MergedScans = {
  histogram({ time, site, sitesA }, loTick, binTick, out) {
    const columns = new TagColumns(0);
    columns.time = time;
    columns.site = site;
    scanHistogram(columns, 0, time.length, histogramRange(sitesA, loTick, binTick, out.length), out);
  },
  matrix({ time, site, sitesA }, { loTick, hiTick }, out) {
    const reach = Math.max(hiTick, -loTick);
    for (let i = 0; i < time.length; i++) {
      const t = time[i]!;
      const s = site[i]!;
      for (let j = i + 1; j < time.length && time[j]! - t <= reach; j++) {
        const other = site[j]!;
        if (s < sitesA === other < sitesA) continue;
        const tau = s < sitesA ? time[j]! - t : t - time[j]!;
        if (tau < loTick || tau > hiTick) continue;
        out[(Math.max(s, other) - sitesA) * sitesA + Math.min(s, other)]! += 1;
      }
    }
  },
};

export function compileMergedScans(wasm: TagWasm): MergedScans {
  const { call } = wasm;
  return {
    histogram: (tags, loTick, binTick, out) =>
      lent(wasm, () => {
        const plan = new HistogramScan(wasm, tags.sitesA, loTick, binTick, out.length);
        const reach = Math.max(loTick + out.length * binTick - 1, -loTick);
        inPieces(wasm, tags, reach, (timeAt, siteAt, startStop, stop) => {
          call.scanTags(plan.at, timeAt, siteAt, 0, startStop, stop);
        });
        plan.takeHistogram(out);
      }),
    matrix: (tags, { loTick, hiTick }, out) =>
      counted(wasm, [out], ([outAt]) => {
        const listAt = wasm.place(2 * 2048 + 16);
        inPieces(wasm, tags, Math.max(hiTick, -loTick), (timeAt, siteAt, startStop, stop) => {
          call.matrixMerged(timeAt, siteAt, 0, startStop, stop, tags.sitesA, loTick, hiTick, outAt!, listAt);
        });
      }),
  };
}

function histogramRange(sitesA: number, loTick: number, binTick: number, bins: number) {
  return {
    sitesA,
    loTick,
    binTick,
    minTauTick: loTick,
    maxTauTick: loTick + bins * binTick - 1,
    hullLoTick: 1,
    hullHiTick: 0,
  };
}

const PIECE = 2 ** 14;

/** Tags in pieces, each with those after it that its last one may meet. */
function inPieces(
  wasm: TagWasm,
  { time, site }: MergedTags,
  reach: number,
  scan: (timeAt: number, siteAt: number, startStop: number, stop: number) => void,
): void {
  let room = 0;
  let timeAt = 0;
  let siteAt = 0;
  for (let start = 0; start < time.length; start += PIECE) {
    const startStop = Math.min(start + PIECE, time.length);
    const last = time[startStop - 1]!;
    const [, stop] = rangeWithin(time, startStop, last, last + reach);
    if (stop - start > room) {
      room = Math.max(2 * PIECE, 2 * (stop - start));
      timeAt = wasm.place(8 * room);
      siteAt = wasm.place(4 * room);
    }
    wasm.f64(timeAt, stop - start).set(time.subarray(start, stop));
    wasm.i32(siteAt, stop - start).set(site.subarray(start, stop));
    scan(timeAt, siteAt, startStop - start, stop - start);
  }
}
