import { AxisBottom, AxisLeft, type AxisScale } from '@visx/axis';
import type { Axis } from '../../shared/contracts/output';
import { axisTitle } from './axis-geometry';
import { toneColour } from './tones';

export interface PlotRect {
  left: number;
  top: number;
  width: number;
  height: number;
}

export interface AxisProps {
  scale: AxisScale<number>;
  ticks: readonly number[];
  format(value: number): string;
  rect: PlotRect;
  em: number;
  /** The colour of an arm is on its axis only; the rest of the axis stays quiet. */
  axis: Pick<Axis, 'label' | 'unit' | 'arm'> | null;
}

const LINE = { stroke: 'var(--color-dim)', strokeWidth: 'var(--plot-hair)' };

function labelColour(axis: Pick<Axis, 'arm'>): string {
  return toneColour(axis.arm ?? 'dim');
}

export function BottomAxis({ scale, ticks, format, rect, em, axis }: AxisProps) {
  const base = rect.top + rect.height;
  return (
    <>
      <AxisBottom
        scale={scale}
        top={base}
        tickValues={[...ticks]}
        tickFormat={(value) => format(Number(value))}
        tickLength={4}
        hideAxisLine
        tickLineProps={LINE}
        tickComponent={({ x, formattedValue }) => (
          <text x={x} y={4 + em * 1.1} textAnchor="middle" fill="var(--color-dim)">
            {formattedValue}
          </text>
        )}
      />
      {axis === null ? null : (
        <text
          x={rect.left + rect.width / 2}
          y={base + 4 + em * 2.6}
          textAnchor="middle"
          fill={labelColour(axis)}
          data-axis="x"
        >
          {axisTitle(axis)}
        </text>
      )}
    </>
  );
}

export function LeftAxis({ scale, ticks, format, rect, em, axis }: AxisProps) {
  return (
    <>
      <AxisLeft
        scale={scale}
        left={rect.left}
        tickValues={[...ticks]}
        tickFormat={(value) => format(Number(value))}
        tickLength={4}
        hideAxisLine
        tickLineProps={LINE}
        tickComponent={({ y, formattedValue }) => (
          <text x={-4 - em * 0.35} y={y + em * 0.34} textAnchor="end" fill="var(--color-dim)">
            {formattedValue}
          </text>
        )}
      />
      {axis === null ? null : (
        <text
          transform={`translate(${em} ${rect.top + rect.height / 2}) rotate(-90)`}
          textAnchor="middle"
          fill={labelColour(axis)}
          data-axis="y"
        >
          {axisTitle(axis)}
        </text>
      )}
    </>
  );
}

/** Edge of the plot; carries the focus ring of the plot it stands in. */
export function Frame({ rect }: { rect: PlotRect }) {
  return (
    <rect
      x={rect.left}
      y={rect.top}
      width={rect.width}
      height={rect.height}
      fill="none"
      stroke="var(--color-strong)"
      strokeWidth="var(--plot-hair)"
      pointerEvents="none"
      className="group-focus-visible/plot:stroke-focus group-focus-visible/plot:stroke-2"
    />
  );
}
