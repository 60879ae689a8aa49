import { TagColumns } from '../../../workers/kernels/tag-columns';
import { type ScanRange, scanHistogram } from '../../../workers/kernels/tag-scan';
import { loadTicks, type OpenKernel } from './adapter';

const REACH = 100_000;
const BINS = 10_000;
const range: ScanRange = {
  sitesA: 1,
  minTauTick: -REACH,
  maxTauTick: REACH - 1,
  loTick: -REACH,
  binTick: (2 * REACH) / BINS,
  hullLoTick: 1,
  hullHiTick: 0,
};

export const histogram: OpenKernel = async (folder) => {
  const a = await loadTicks(folder, 'a.i64');
  const b = await loadTicks(folder, 'b.i64');
  let counts = new Float64Array(BINS);
  return {
    work(items) {
      counts = new Float64Array(BINS);
      const n = items / 2;
      const tags = new TagColumns(items);
      tags.count = items;
      let i = 0;
      let j = 0;
      for (let at = 0; at < items; at++) {
        const fromA = j === n || (i < n && a[i]! <= b[j]!);
        tags.time[at] = fromA ? a[i++]! : b[j++]!;
        tags.site[at] = fromA ? 0 : 1;
      }
      scanHistogram(tags, 0, items, range, counts);
    },
    answer: () => counts,
  };
};
