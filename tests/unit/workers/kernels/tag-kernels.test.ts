import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { TagColumns } from '../../../../workers/kernels/tag-columns';
import {
  type PairSink,
  type ScanRange,
  scanBetween,
  scanHistogram,
  scanWindows,
} from '../../../../workers/kernels/tag-scan';
import { firstAbove, firstAtLeast, sortTags } from '../../../../workers/kernels/tag-sort';

fc.configureGlobal({ seed: 1 });

function columnsOf(tags: { time: number; site: number }[]): TagColumns {
  const columns = new TagColumns(1);
  columns.append(
    Float64Array.from(tags, (tag) => tag.time),
    Int32Array.from(tags, (tag) => tag.site),
    0,
    tags.length,
    0,
  );
  return columns;
}

/** A tiny sink, so that scans drain in the middle of their inner loops. */
function collectingSink(capacity: number): PairSink & { pairs: number[][] } {
  const sink = {
    capacity,
    timeA: new Float64Array(capacity),
    tau: new Float64Array(capacity),
    pixelA: new Int32Array(capacity),
    pixelB: new Int32Array(capacity),
    pairs: [] as number[][],
    drain(count: number) {
      for (let i = 0; i < count; i++) {
        sink.pairs.push([sink.timeA[i]!, sink.tau[i]!, sink.pixelA[i]!, sink.pixelB[i]!]);
      }
    },
  };
  return sink;
}

const SITES_A = 3;
const tags = fc.array(fc.record({ time: fc.integer({ min: -200, max: 200 }), site: fc.nat(6) }), {
  maxLength: 120,
  size: 'max',
});
const ranges: fc.Arbitrary<ScanRange & { bins: number }> = fc
  .tuple(
    fc.integer({ min: -30, max: 20 }),
    fc.integer({ min: 1, max: 7 }),
    fc.nat(8),
    fc.integer({ min: -30, max: 30 }),
  )
  .map(([loTick, binTick, bins, hullLoTick]) => ({
    sitesA: SITES_A,
    loTick,
    binTick,
    bins,
    hullLoTick,
    hullHiTick: hullLoTick + 9,
    minTauTick: Math.min(loTick, hullLoTick),
    maxTauTick: Math.max(loTick + bins * binTick - 1, hullLoTick + 9),
  }));

const byText = (pairs: number[][]) => pairs.map((pair) => pair.join()).sort();

describe('time order', () => {
  it('is that of a plain sort, sites moving with their times', () => {
    const long = fc.array(fc.integer({ min: -500, max: 500 }), { maxLength: 300, size: 'max' });
    fc.assert(
      fc.property(long, fc.constantFrom(0, 1, 40), (times, drift) => {
        const drifting = times.map((time, i) => ({ time: time + drift * i, site: i }));
        const columns = columnsOf(drifting);
        sortTags(columns, 0, columns.count, new TagColumns(1));
        const got = [...columns.site.subarray(0, columns.count)].map((site) => drifting[site]!.time);
        expect(got).toEqual(drifting.map(({ time }) => time).sort((a, b) => a - b));
        expect([...columns.time.subarray(0, columns.count)]).toEqual(got);
        expect(new Set(columns.site.subarray(0, columns.count)).size).toBe(times.length);
      }),
    );
  });

  it('finds the first time at or above a limit', () => {
    const time = Float64Array.of(1, 2, 2, 5);
    expect([firstAtLeast(time, 0, 4, 2), firstAbove(time, 0, 4, 2)]).toEqual([1, 3]);
    expect([firstAtLeast(time, 0, 4, 6), firstAbove(time, 0, 0, 0)]).toEqual([4, 0]);
  });
});

/** All-pairs delay histogram of two lists by a double loop, bins [lo + m bin, lo + (m + 1) bin). */
function slowHistogram(
  a: number[],
  b: number[],
  range: Pick<ScanRange, 'loTick' | 'binTick'> & { bins: number },
): Float64Array {
  const out = new Float64Array(range.bins);
  for (const from of a) {
    for (const to of b) {
      const bin = Math.floor((to - from - range.loTick) / range.binTick);
      if (bin >= 0 && bin < range.bins) out[bin]! += 1;
    }
  }
  return out;
}

describe('delay histogram of the merged stream', () => {
  it('gives check A03', () => {
    // Check A03: derived here by numerics; verified by double loop and numpy.histogram.
    const tags = [
      ...[0, 10, 20, 30].map((time) => ({ time, site: 0 })),
      ...[1, 12, 29, 33].map((time) => ({ time, site: SITES_A })),
    ].sort((p, q) => p.time - q.time);
    const columns = columnsOf(tags);
    const out = new Float64Array(6);
    const range = {
      loTick: -15,
      binTick: 5,
      bins: 6,
      hullLoTick: 0,
      hullHiTick: 0,
      minTauTick: -15,
      maxTauTick: 14,
      sitesA: SITES_A,
    };
    scanHistogram(columns, 0, columns.count, range, out);
    expect([...out]).toEqual([0, 2, 1, 3, 1, 2]);
  });
});

describe('scan of the merged stream', () => {
  it('equals the two-list histogram and finds each window pair once', () => {
    fc.assert(
      fc.property(tags, ranges, fc.constantFrom(1, 3, 64), (given, range, capacity) => {
        const sorted = [...given].sort((p, q) => p.time - q.time);
        const columns = columnsOf(sorted);
        const a = sorted.filter(({ site }) => site < SITES_A);
        const b = sorted.filter(({ site }) => site >= SITES_A);
        const times = (list: typeof a) => list.map(({ time }) => time);
        const slow = slowHistogram(times(a), times(b), range);
        const plain = new Float64Array(range.bins);
        scanHistogram(columns, 0, columns.count, range, plain);
        expect(plain).toEqual(slow);
        const sink = collectingSink(capacity);
        const counts = new Float64Array(range.bins);
        scanWindows(columns, 0, columns.count, range, counts, sink);
        expect(counts).toEqual(slow);
        const pairs = a.flatMap((p) =>
          b
            .filter((q) => q.time - p.time >= range.hullLoTick && q.time - p.time <= range.hullHiTick)
            .map((q) => [p.time, q.time - p.time, p.site, q.site - SITES_A]),
        );
        expect(byText(sink.pairs)).toEqual(byText(pairs));
      }),
    );
  });

  it('splits into within and between for any two lists', () => {
    fc.assert(
      fc.property(tags, tags, ranges, (left, right, range) => {
        const scan = (list: typeof left) => {
          const columns = columnsOf([...list].sort((p, q) => p.time - q.time));
          const counts = new Float64Array(range.bins);
          const sink = collectingSink(5);
          scanWindows(columns, 0, columns.count, range, counts, sink);
          return { columns, counts, pairs: sink.pairs };
        };
        const whole = scan([...left, ...right]);
        const first = scan(left);
        const second = scan(right);
        const counts = new Float64Array(range.bins);
        const sink = collectingSink(5);
        scanBetween(first.columns, left.length, second.columns, 0, right.length, range, counts, sink);
        expect(counts.map((n, i) => n + first.counts[i]! + second.counts[i]!)).toEqual(whole.counts);
        expect(byText([...sink.pairs, ...first.pairs, ...second.pairs])).toEqual(byText(whole.pairs));
      }),
    );
  });
});
