import type { BoundRulerProps } from './types';

export function BoundRuler(props: BoundRulerProps) {
  return <figure data-plot={'BoundRuler'} aria-label={JSON.stringify(Object.keys(props))} />;
}
