import type { Span } from './axis-geometry';
import type { PlotRect } from './PlotAxes';
import { toneColour } from './tones';
import type { Band, Brush, LinePlotProps } from './types';

interface Place {
  x(at: number): number;
  rect: PlotRect;
  em: number;
}

/** Shaded stretches of the axis, e.g. shifted windows. */
export function Bands({ bands, x, rect }: { bands: readonly Band[] } & Pick<Place, 'x' | 'rect'>) {
  return bands.map(({ lo, hi, tone, label }) => (
    <g key={`${label}-${lo}-${hi}`} data-band={label}>
      <rect
        x={x(lo)}
        y={rect.top}
        width={Math.max(1, x(hi) - x(lo))}
        height={rect.height}
        fill={toneColour(tone)}
        fillOpacity={0.2}
      />
      <path
        d={`M${x(lo)} ${rect.top}v${rect.height}M${x(hi)} ${rect.top}v${rect.height}`}
        stroke={toneColour(tone)}
        strokeOpacity={0.7}
        strokeDasharray="1 2"
      />
    </g>
  ));
}

/** The brushed window: edges with grips, its centre dotted. */
export function BrushArea({ brush, x, rect }: { brush: Brush } & Pick<Place, 'x' | 'rect'>) {
  const [lo, hi, centre] = [x(brush.lo), x(brush.hi), x(brush.centre)];
  const middle = rect.top + rect.height / 2;
  return (
    <g data-brush-area="">
      <rect
        x={lo}
        y={rect.top}
        width={Math.max(1, hi - lo)}
        height={rect.height}
        fill="var(--color-pair)"
        fillOpacity={0.1}
      />
      <path
        d={`M${centre} ${rect.top}v${rect.height}`}
        stroke="var(--color-dim)"
        strokeDasharray="1 3"
        strokeWidth="var(--plot-hair)"
      />
      <path
        d={`M${lo} ${rect.top}v${rect.height}M${hi} ${rect.top}v${rect.height}`}
        stroke="var(--color-pair)"
        strokeWidth="var(--plot-hair)"
      />
      <path
        d={`M${lo} ${middle - 8}v16M${hi} ${middle - 8}v16`}
        stroke="var(--color-pair)"
        strokeWidth={4}
        strokeLinecap="round"
      />
    </g>
  );
}

/** Rows in which labels at these pixels do not touch, from the top. */
export function labelRows(labels: readonly { x: number; width: number }[]): number[] {
  const ends: number[] = [];
  return labels.map(({ x, width }) => {
    let row = ends.findIndex((end) => end < x);
    if (row < 0) row = ends.length;
    ends[row] = x + width;
    return row;
  });
}

export function Marks({ marks, x, rect, em, view }: { marks: LinePlotProps['marks']; view: Span } & Place) {
  const shown = (marks ?? []).filter(({ at }) => at >= view[0] && at <= view[1]).sort((a, b) => a.at - b.at);
  const rows = labelRows(shown.map(({ at, label }) => ({ x: x(at), width: (label.length + 1) * em * 0.62 })));
  return shown.map(({ at, label }, i) => {
    const fromRight = x(at) + label.length * em * 0.62 + 4 > rect.left + rect.width;
    return (
      <g key={`${label}-${at}`} data-mark={label}>
        <path
          d={`M${x(at)} ${rect.top}v${rect.height}`}
          stroke="var(--color-dim)"
          strokeDasharray="4 3"
          strokeWidth="var(--plot-hair)"
        />
        <text
          x={x(at) + (fromRight ? -4 : 4)}
          y={rect.top + em * (1.2 + 1.3 * rows[i]!)}
          textAnchor={fromRight ? 'end' : 'start'}
          fill="var(--color-text)"
          stroke="var(--color-bg)"
          strokeWidth={3}
          paintOrder="stroke"
        >
          {label}
        </text>
      </g>
    );
  });
}

/** Swatches for the bands and the window, each label once. */
export function LineKeys({
  bands = [],
  brush,
  model,
}: {
  bands?: readonly Band[];
  brush?: Brush;
  model: boolean;
}) {
  const entries = new Map(bands.map(({ label, tone }) => [label, toneColour(tone)]));
  if (brush) entries.set(brush.label ?? 'window', 'var(--color-pair)');
  return (
    <span className="flex shrink-0 items-center gap-3">
      {[...entries].map(([label, colour]) => (
        <span key={label} className="flex items-center gap-1">
          <svg width="10" height="9" aria-hidden="true">
            <rect x="0.5" y="0.5" width="9" height="8" fill={colour} fillOpacity={0.25} stroke={colour} />
          </svg>
          {label}
        </span>
      ))}
      {model ? (
        <span className="flex items-center gap-1">
          <svg width="14" height="9" aria-hidden="true">
            <path d="M0 4.5H14" stroke="var(--color-text)" strokeWidth="var(--plot-line)" />
          </svg>
          model
        </span>
      ) : null}
    </span>
  );
}
