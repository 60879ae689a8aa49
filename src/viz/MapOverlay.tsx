import type { Ellipse } from '../../shared/contracts/output';
import { ellipsePoints } from './ellipse';
import type { PlotRect } from './PlotAxes';
import { toneColour } from './tones';
import type { PlotPoint, PlotRegion, RegionMark } from './types';

/** From axis units to pixels. */
export interface Project {
  x(at: number): number;
  y(at: number): number;
}

export const ELLIPSE_SIGMAS = 2;

export function EllipseMark({ ellipse, project }: { ellipse: Ellipse; project: Project }) {
  const points = ellipsePoints(ellipse, ELLIPSE_SIGMAS);
  if (points.length === 0) return null;
  const d = `M${points.map(({ x, y }) => `${project.x(x).toFixed(2)} ${project.y(y).toFixed(2)}`).join('L')}Z`;
  // A dark line under the light one keeps it visible over any count.
  return (
    <g fill="none" data-ellipse="">
      <path d={d} stroke="var(--color-bg)" strokeOpacity={0.55} strokeWidth={3.5} />
      <path d={d} stroke="var(--color-pair)" strokeWidth="var(--plot-line)" />
    </g>
  );
}

export function Crosshair({ at, project, rect }: { at: PlotPoint; project: Project; rect: PlotRect }) {
  const [x, y] = [project.x(at.x), project.y(at.y)];
  const d = `M${x} ${rect.top}V${rect.top + rect.height}M${rect.left} ${y}H${rect.left + rect.width}`;
  return (
    <g fill="none" pointerEvents="none" data-crosshair="">
      <path d={d} stroke="var(--color-bg)" strokeOpacity={0.5} strokeWidth={2.5} />
      <path d={d} stroke="var(--color-text)" strokeWidth="var(--plot-hair)" strokeDasharray="2 3" />
    </g>
  );
}

function box(region: PlotRegion, project: Project): PlotRect {
  const [x0, x1] = [project.x(region.x0), project.x(region.x1)];
  const [y0, y1] = [project.y(region.y0), project.y(region.y1)];
  return {
    left: Math.min(x0, x1),
    top: Math.min(y0, y1),
    width: Math.abs(x1 - x0),
    height: Math.abs(y1 - y0),
  };
}

export function RegionBox({ mark, project, em }: { mark: RegionMark; project: Project; em: number }) {
  const { left, top, width, height } = box(mark.region, project);
  const colour = toneColour(mark.tone);
  return (
    <g data-region={mark.label}>
      <rect
        x={left}
        y={top}
        width={width}
        height={height}
        fill="none"
        stroke="var(--color-bg)"
        strokeOpacity={0.6}
        strokeWidth={4}
      />
      <rect
        x={left}
        y={top}
        width={width}
        height={height}
        fill="none"
        stroke={colour}
        strokeWidth="var(--plot-line)"
      />
      <text
        x={left + 3}
        y={top + em * 1.05}
        fill={colour}
        stroke="var(--color-bg)"
        strokeWidth={3}
        paintOrder="stroke"
        fontWeight={600}
      >
        {mark.label}
      </text>
    </g>
  );
}

export function DraftRegion({ region, project }: { region: PlotRegion; project: Project }) {
  const { left, top, width, height } = box(region, project);
  return (
    <rect
      x={left}
      y={top}
      width={width}
      height={height}
      fill="var(--color-text)"
      fillOpacity={0.12}
      stroke="var(--color-text)"
      strokeDasharray="4 3"
      data-draft-region=""
    />
  );
}
