import type { MapData } from '../../../shared/contracts/output';

const LEAST_BINS = 12;

/** The part of a 1-D map between two positions, whole bins; the map itself where too little would be left. */
export function cropLine(map: MapData, [lo, hi]: readonly [number, number]): MapData {
  const axis = map.axes[0]!;
  const bins = map.shape[0] ?? 0;
  const ends = [(lo - axis.start) / axis.step, (hi - axis.start) / axis.step];
  const from = Math.max(0, Math.floor(Math.min(...ends)));
  const to = Math.min(bins, Math.ceil(Math.max(...ends)) + 1);
  if (to - from < LEAST_BINS || to - from >= bins) return map;
  return {
    ...map,
    shape: [to - from],
    axes: [{ ...axis, start: axis.start + from * axis.step }],
    data: map.data.subarray(from, to),
    ...(map.masked ? { masked: map.masked.subarray(from, to) } : {}),
    ...(map.sigma ? { sigma: map.sigma.subarray(from, to) } : {}),
    ...(map.model ? { model: map.model.subarray(from, to) } : {}),
  };
}
