import { memo } from 'react';
import type { MapData } from '../../shared/contracts/output';
import { curvePath, dotPath, errorPath, linePath, type Scales, stepPath } from './line-paths';
import type { LinePlotProps } from './types';

interface LineDataProps {
  map: MapData;
  bins: { from: number; to: number };
  scales: Scales;
  style: LinePlotProps['style'];
  colour: string;
  showModel: boolean;
  /** CSS pixels to a bin: error bars of steps are drawn only where they can be told apart. */
  binPx: number;
}

/** Narrowest bin whose error bar is drawn over a step. */
const ERROR_BAR_PX = 7;

/** The data, their error bars and the model, each one path. */
export const LineData = memo(function LineData(props: LineDataProps) {
  const { map, bins, scales, style, colour, showModel, binPx } = props;
  const withErrors = style === 'points' || (style === 'steps' && binPx >= ERROR_BAR_PX);
  return (
    <g fill="none">
      {withErrors ? (
        <path
          d={errorPath(map, bins, scales)}
          stroke={colour}
          strokeWidth="var(--plot-hair)"
          data-errors=""
        />
      ) : null}
      {style === 'points' ? (
        <path
          d={dotPath(map, bins, map.data, scales)}
          stroke={colour}
          strokeWidth="var(--plot-dot)"
          strokeLinecap="round"
          data-points=""
        />
      ) : (
        <path
          d={style === 'steps' ? stepPath(map, bins, scales) : linePath(map, bins, map.data, scales)}
          stroke={colour}
          strokeWidth="var(--plot-line)"
          strokeLinejoin="round"
          data-line=""
        />
      )}
      {showModel && map.model ? (
        <path
          d={curvePath(map, bins, map.model, scales)}
          stroke="var(--color-text)"
          strokeWidth="var(--plot-line)"
          data-model=""
        />
      ) : null}
    </g>
  );
});

export function Residuals({
  map,
  bins,
  scales,
  values,
}: Omit<LineDataProps, 'style' | 'colour' | 'showModel' | 'binPx'> & { values: Float64Array }) {
  return (
    <path
      d={dotPath(map, bins, values, scales)}
      fill="none"
      stroke="var(--color-dim)"
      strokeWidth="calc(var(--plot-dot) * 0.75)"
      strokeLinecap="round"
      data-residuals=""
    />
  );
}
