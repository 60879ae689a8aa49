import { compileMergedScans, type MergedTags } from '../../../workers/kernels/tag-merged';
import { loadTicks, loadU16, type OpenKernel } from './adapter';
import { kernelsOf } from './kernels';

/** Scans of one stream of both arms in time order, which is what an acquisition is. */

async function loadMerged(folder: string, sitesA: number): Promise<MergedTags> {
  return {
    time: await loadTicks(folder, 'merged.i64'),
    site: Int32Array.from(await loadU16(folder, 'merged.u16')),
    sitesA,
  };
}

function first({ time, site, sitesA }: MergedTags, items: number): MergedTags {
  return { time: time.subarray(0, items), site: site.subarray(0, items), sitesA };
}

const SIDE = 64;

export const matrixMerged: OpenKernel = async (folder) => {
  const scans = compileMergedScans(await kernelsOf('tags'));
  const tags = await loadMerged(folder, SIDE);
  let counts = new Float64Array(SIDE * SIDE);
  return {
    work(items) {
      counts = new Float64Array(SIDE * SIDE);
      scans.matrix(first(tags, items), { loTick: -2000, hiTick: 2000 }, counts);
    },
    /** Rows are the idler's pixels here, the signal's with the others. */
    answer: () => Float64Array.from(counts, (_, at) => counts[(at % SIDE) * SIDE + Math.floor(at / SIDE)]!),
  };
};
