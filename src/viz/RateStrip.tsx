import type { RateStripProps } from './types';

export function RateStrip(props: RateStripProps) {
  return <figure data-plot={'RateStrip'} aria-label={JSON.stringify(Object.keys(props))} />;
}
