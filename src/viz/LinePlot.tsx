import type { LinePlotProps } from './types';

export function LinePlot(props: LinePlotProps) {
  return <figure data-plot={'LinePlot'} aria-label={JSON.stringify(Object.keys(props))} />;
}
