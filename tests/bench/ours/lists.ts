import { compileListScans } from '../../../workers/kernels/tag-lists-wasm';
import { loadTicks, loadU16, type OpenKernel } from './adapter';
import { kernelsOf } from './kernels';

/** Scans of two sorted lists; half of the items are in each. */

const REACH = 100_000;
const BINS = 10_000;

export const histogram: OpenKernel = async (folder) => {
  const scans = compileListScans(await kernelsOf('tags'));
  const a = await loadTicks(folder, 'a.i64');
  const b = await loadTicks(folder, 'b.i64');
  let counts = new Float64Array(BINS);
  return {
    work(items) {
      counts = new Float64Array(BINS);
      const n = items / 2;
      scans.histogram(a.subarray(0, n), b.subarray(0, n), -REACH, (2 * REACH) / BINS, counts);
    },
    answer: () => counts,
  };
};

const SIDE = 64;

export const matrixLists: OpenKernel = async (folder) => {
  const scans = compileListScans(await kernelsOf('tags'));
  const signal = await loadTicks(folder, 's.i64');
  const pixel = await loadU16(folder, 's.u16');
  const idler = await loadTicks(folder, 'i.i64');
  const partner = await loadU16(folder, 'i.u16');
  const window = { loTick: -2000, hiTick: 2000 };
  let counts = new Float64Array(SIDE * SIDE);
  return {
    work(items) {
      counts = new Float64Array(SIDE * SIDE);
      const n = items / 2;
      scans.matrix(idler.subarray(0, n), partner, signal.subarray(0, n), pixel, window, SIDE, counts);
    },
    answer: () => counts,
  };
};

const PIXELS = 1024;
const windows = [25_000, 225_000].map((delay) => ({ loTick: delay - 1500, hiTick: delay + 1500 }));

export const heralded: OpenKernel = async (folder) => {
  const scans = compileListScans(await kernelsOf('tags'));
  const bucket = await loadTicks(folder, 'bucket.i64');
  const array = await loadTicks(folder, 'array.i64');
  const pixel = await loadU16(folder, 'array.u16');
  const counts = new Float64Array(2 * PIXELS);
  const images = [counts.subarray(0, PIXELS), counts.subarray(PIXELS)];
  return {
    work(items) {
      counts.fill(0);
      const n = items / 2;
      scans.images(array.subarray(0, n), pixel, bucket.subarray(0, n), windows, images);
    },
    answer: () => counts,
  };
};
