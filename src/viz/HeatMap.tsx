import type { HeatMapProps } from './types';

export function HeatMap(props: HeatMapProps) {
  return <figure data-plot={'HeatMap'} aria-label={JSON.stringify(Object.keys(props))} />;
}
