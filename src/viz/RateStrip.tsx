import { toneColour } from './tones';
import type { RateStripProps } from './types';

/** The line from the first value to the last in a box of 1 by 1, zero at its foot; gaps where there is no number. */
export function stripPath(values: ArrayLike<number>): string {
  let top = 0;
  for (let i = 0; i < values.length; i++) if (values[i]! > top) top = values[i]!;
  const last = Math.max(1, values.length - 1);
  let isDown = false;
  let d = '';
  for (let i = 0; i < values.length; i++) {
    const value = values[i]!;
    if (!Number.isFinite(value)) {
      isDown = false;
      continue;
    }
    d += `${isDown ? 'L' : 'M'}${(i / last).toFixed(4)} ${(1 - (top > 0 ? value / top : 0)).toFixed(4)}`;
    isDown = true;
  }
  return d;
}

/** Rates over the acquisition at a glance, one above the other, each from zero: a drop-out or a drift shows. */
export function RateStrip({ series, label, height = 28 }: RateStripProps) {
  const share = height / Math.max(1, series.length);
  return (
    <svg role="img" aria-label={label} width="100%" height={height} className="block overflow-visible">
      {series.map(({ tone, label: name, values }, i) => (
        <svg
          key={name}
          aria-hidden="true"
          y={i * share + 1.5}
          width="100%"
          height={Math.max(1, share - 3)}
          viewBox="0 0 1 1"
          preserveAspectRatio="none"
          className="overflow-visible"
        >
          <path
            d={stripPath(values)}
            fill="none"
            stroke={toneColour(tone)}
            strokeWidth="var(--plot-hair)"
            vectorEffect="non-scaling-stroke"
          />
        </svg>
      ))}
    </svg>
  );
}
