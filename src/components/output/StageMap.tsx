import { useMemo } from 'react';
import type { MapData } from '../../../shared/contracts/output';
import { HeatMap } from '../../viz/HeatMap';
import type { HeatMapProps } from '../../viz/types';
import { useBox } from '../../viz/use-box';

/** Height over width of a square map with its axes and colour bar; kept inside these pixels. */
const ASPECT = 0.86;
const [LEAST, MOST] = [300, 600];

/** Counts less accidentals that dip below zero by no more than this share of their top are still counts to the eye. */
const NOISE_SHARE = 0.2;

/**
 * Net counts scatter about zero where there is nothing. On a scale centred on zero half the colours would be spent on
 * that noise, so they are drawn as counts; the colour bar says that values below zero lie at its foot.
 */
export function usePresentable(map: MapData): MapData {
  return useMemo(() => {
    if (map.scale !== 'signed' || (map.unit !== 'pairs' && map.unit !== 'counts')) return map;
    const { data, masked } = map;
    let [lo, hi] = [0, 0];
    for (let i = 0; i < data.length; i++) {
      if (masked?.[i] === 1) continue;
      const value = data[i]!;
      if (value < lo) lo = value;
      if (value > hi) hi = value;
    }
    return -lo < NOISE_SHARE * hi ? { ...map, scale: 'counts' } : map;
  }, [map]);
}

/** A map as large as its place on the stage allows. */
export function StageMap({ map, logScale = false, ...rest }: HeatMapProps) {
  const [ref, { width }] = useBox<HTMLDivElement>();
  const height = Math.round(Math.min(MOST, Math.max(LEAST, width * ASPECT)));
  return (
    <div ref={ref} className="select-none" style={{ minHeight: height }}>
      {width === 0 ? null : (
        <HeatMap map={map} logScale={logScale && map.scale === 'counts'} height={height} {...rest} />
      )}
    </div>
  );
}
