import { displayUnit } from '../lib/format-number';
import { type ColourScale, colourTicks } from './colour-scale';
import type { PlotRect } from './PlotAxes';
import type { Palette } from './palettes';

export interface ColourBarProps {
  scale: ColourScale;
  palette: Palette;
  /** Of the map: the bar stands right of it, as tall. */
  rect: PlotRect;
  em: number;
  unit: string;
}

/** Enough slices to look continuous, few enough to be cheap. */
const SLICES = 64;

export function ColourBar({ scale, palette, rect, em, unit }: ColourBarProps) {
  const x = rect.left + rect.width + em * 1.1;
  const width = Math.round(em * 0.75);
  const slice = rect.height / SLICES;
  const ticks = colourTicks(scale, Math.max(2, Math.min(6, Math.floor(rect.height / (em * 4)))));
  const right = x + width;
  return (
    <g data-colour-bar="">
      {Array.from({ length: SLICES }, (_, i) => (
        <rect
          // biome-ignore lint/suspicious/noArrayIndexKey: the slices never change places
          key={i}
          x={x}
          y={rect.top + rect.height - (i + 1) * slice}
          width={width}
          height={slice + 0.5}
          fill={palette.css[Math.round((i / (SLICES - 1)) * (palette.css.length - 1))]}
          shapeRendering="crispEdges"
        />
      ))}
      <rect
        x={x}
        y={rect.top}
        width={width}
        height={rect.height}
        fill="none"
        stroke="var(--color-strong)"
        strokeWidth="var(--plot-hair)"
      />
      {ticks.map(({ share, label }) => {
        const y = rect.top + rect.height * (1 - share);
        return (
          <g key={`${label}-${share}`}>
            <line
              x1={right}
              x2={right + 3}
              y1={y}
              y2={y}
              stroke="var(--color-dim)"
              strokeWidth="var(--plot-hair)"
            />
            <text x={right + em * 0.55} y={y + em * 0.34} fill="var(--color-dim)">
              {label}
            </text>
          </g>
        );
      })}
      <Clipped show={scale.clipsHigh} x={x} width={width} y={rect.top - 1} up />
      <Clipped show={scale.clipsLow} x={x} width={width} y={rect.top + rect.height + 1} up={false} />
      <text x={right + em * 0.55} y={rect.top + rect.height + em * 1.6} fill="var(--color-dim)">
        {displayUnit(unit)}
        {scale.log ? ' log' : ''}
      </text>
    </g>
  );
}

/** A pointed end: data go on beyond the scale. */
function Clipped({
  show,
  x,
  width,
  y,
  up,
}: {
  show: boolean;
  x: number;
  width: number;
  y: number;
  up: boolean;
}) {
  if (!show) return null;
  const tip = up ? y - width * 0.7 : y + width * 0.7;
  return (
    <path d={`M${x} ${y}H${x + width}L${x + width / 2} ${tip}Z`} fill="var(--color-warn)">
      <title>
        {up ? 'Values above the scale are drawn at its top' : 'Values below the scale are drawn at its foot'}
      </title>
    </path>
  );
}
