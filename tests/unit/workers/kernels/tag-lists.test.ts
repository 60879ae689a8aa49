import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { TagColumns } from '../../../../workers/kernels/tag-columns';
import { type ListScans, scriptListScans } from '../../../../workers/kernels/tag-lists';
import { compileListScans } from '../../../../workers/kernels/tag-lists-wasm';
import {
  compileMergedScans,
  type MergedScans,
  scriptMergedScans,
} from '../../../../workers/kernels/tag-merged';
import { dropDead } from '../../../../workers/kernels/tag-order';
import { tagKernels } from './tag-kernels-compiled';

fc.configureGlobal({ seed: 1 });
const kernels = await tagKernels();

const list = (max: number) =>
  fc
    .array(fc.integer({ min: -max, max }), { maxLength: 120, size: 'max' })
    .map((ticks) => Float64Array.from(ticks).sort());
const lists = fc.constantFrom(60, 3000).chain((max) => fc.tuple(list(max), list(max), list(max)));
const windows = fc
  .tuple(fc.integer({ min: -40, max: 40 }), fc.nat(30))
  .map(([loTick, width]) => ({ loTick, hiTick: loTick + width }));
const siteOf = (tick: number, i: number): number => Math.abs(tick * 7 + i * 3) % 5;
const sitesOf = (ticks: Float64Array): Uint16Array => Uint16Array.from(ticks, siteOf);

const listScans: [string, ListScans][] = [
  ['readable', scriptListScans],
  ['compiled', compileListScans(kernels)],
];

describe.each(listScans)('list scans, %s', (_name, scans) => {
  it('equal double loops', () => {
    fc.assert(
      fc.property(
        lists,
        windows,
        windows,
        fc.integer({ min: 1, max: 9 }),
        ([x, y, z], window, other, binTick) => {
          const sitesX = sitesOf(x);
          const sitesY = sitesOf(y);
          const histogram = new Float64Array(12);
          const matrix = new Float64Array(25);
          const image = new Float64Array(5);
          const triples = new Float64Array(4);
          x.forEach((t, i) => {
            let ones = 0;
            let twos = 0;
            y.forEach((u, j) => {
              const bin = Math.floor((u - t - window.loTick) / binTick);
              if (bin >= 0 && bin < 12) histogram[bin]! += 1;
              if (u - t < window.loTick || u - t > window.hiTick) return;
              matrix[sitesY[j]! * 5 + sitesX[i]!]! += 1;
              ones += 1;
            });
            y.forEach((u) => {
              if (t - u >= other.loTick && t - u <= other.hiTick) image[sitesX[i]!]! += 1;
            });
            z.forEach((u) => {
              if (u - t >= other.loTick && u - t <= other.hiTick) twos += 1;
            });
            triples[0]! += Math.min(1, ones);
            triples[1]! += Math.min(1, twos);
            triples[2]! += Math.min(1, ones * twos);
            triples[3]! += ones * twos;
          });
          const out = new Float64Array(12);
          scans.histogram(x, y, window.loTick, binTick, out);
          expect(out).toEqual(histogram);
          const cells = new Float64Array(25);
          scans.matrix(x, sitesX, y, sitesY, window, 5, cells);
          expect(cells).toEqual(matrix);
          const images = [new Float64Array(5), new Float64Array(5)];
          scans.images(x, sitesX, y, [other, { loTick: 1, hiTick: 0 }], images);
          expect(images).toEqual([image, new Float64Array(5)]);
          const threes = new Float64Array(4);
          scans.triples(x, y, window, z, other, threes);
          expect(threes).toEqual(triples);
        },
      ),
      { numRuns: 150 },
    );
  });
});

const mergedScans: [string, MergedScans][] = [
  ['readable', scriptMergedScans],
  ['compiled', compileMergedScans(kernels)],
];

describe.each(mergedScans)('merged scans, %s', (_name, scans) => {
  it('equal double loops', () => {
    fc.assert(
      fc.property(lists, windows, fc.integer({ min: 1, max: 9 }), ([time], window, binTick) => {
        const site = Int32Array.from(time, siteOf);
        const histogram = new Float64Array(12);
        const matrix = new Float64Array(6);
        time.forEach((t, i) => {
          time.forEach((u, j) => {
            if (site[i]! >= 2 || site[j]! < 2) return;
            const bin = Math.floor((u - t - window.loTick) / binTick);
            if (bin >= 0 && bin < 12) histogram[bin]! += 1;
            if (u - t >= window.loTick && u - t <= window.hiTick) matrix[(site[j]! - 2) * 2 + site[i]!]! += 1;
          });
        });
        const tags = { time, site, sitesA: 2 };
        const out = new Float64Array(12);
        scans.histogram(tags, window.loTick, binTick, out);
        expect(out).toEqual(histogram);
        const cells = new Float64Array(6);
        scans.matrix(tags, window, cells);
        expect(cells).toEqual(matrix);
      }),
      { numRuns: 150 },
    );
  });
});

describe('long lists', () => {
  it('count alike over many pieces, and give the memory back', () => {
    const ticks = (step: number, from: number): Float64Array =>
      Float64Array.from({ length: 70_000 }, (_, i) => from + i * step + ((i * 7919) % 13));
    const x = ticks(10, 0).sort();
    const y = ticks(11, -50_000).sort();
    const { mark } = kernels;
    const counts = listScans.map(([, scans]) => {
      const out = new Float64Array(50);
      scans.histogram(x, y, -100, 4, out);
      scans.matrix(x, sitesOf(x), y, sitesOf(y), { loTick: -20, hiTick: 30 }, 5, out);
      return out;
    });
    expect(counts[1]).toEqual(counts[0]);
    expect(counts[0]!.reduce((sum, n) => sum + n, 0)).toBeGreaterThan(100_000);
    expect(kernels.mark).toBe(mark);
  });
});

describe('dead time', () => {
  it('drops what comes too soon after the last kept tag of its site, compiled alike', () => {
    fc.assert(
      fc.property(lists, fc.nat(30), ([time], deadTick) => {
        const site = Int32Array.from(time, (t) => Math.abs(t) % 3);
        const columns = new TagColumns(1);
        columns.append(time, site, 0, time.length, 0);
        const last = new Float64Array(3).fill(Number.NEGATIVE_INFINITY);
        const kept = dropDead(columns, deadTick, last);
        const stays: boolean[] = [];
        time.forEach((t, i) => {
          const before = stays.findLastIndex((stayed, j) => stayed && site[j] === site[i]);
          stays.push(before < 0 || t - time[before]! >= deadTick);
        });
        const expected = [...time.filter((_, i) => stays[i])];
        expect([...columns.time.subarray(0, kept)]).toEqual(expected);

        const { mark } = kernels;
        const [timeAt, siteAt, lastAt] = [kernels.place(1024), kernels.place(512), kernels.place(24)];
        kernels.f64(timeAt, time.length).set(time);
        kernels.i32(siteAt, time.length).set(site);
        kernels.f64(lastAt, 3).fill(Number.NEGATIVE_INFINITY);
        const stay = kernels.call.dropDead(timeAt, siteAt, time.length, deadTick, lastAt);
        expect([...kernels.f64(timeAt, stay)]).toEqual(expected);
        expect(kernels.f64(lastAt, 3)).toEqual(last);
        kernels.release(mark);
      }),
      { numRuns: 100 },
    );
  });
});
