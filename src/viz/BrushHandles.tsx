import { type KeyboardEvent, type PointerEvent, useRef } from 'react';
import type { Axis } from '../../shared/contracts/output';
import { displayUnit } from '../lib/format-number';
import { type Span, shiftInside } from './axis-geometry';
import { formatPosition } from './format-tick';
import type { PlotRect } from './PlotAxes';
import type { Brush } from './types';

export interface BrushHandlesProps {
  brush: Brush;
  axis: Axis;
  full: Span;
  view: Span;
  rect: PlotRect;
  /** Axis position under a pointer. */
  toAxis(event: PointerEvent): number;
}

type Part = 'lo' | 'hi' | 'both';

/** Half the width of what can be grabbed, in CSS pixels. */
const GRAB_PX = 6;

const KEY_BINS: Record<string, number> = {
  ArrowLeft: -1,
  ArrowDown: -1,
  ArrowRight: 1,
  ArrowUp: 1,
  PageDown: -10,
  PageUp: 10,
};

/** The window with one part moved: the edges never cross, the whole keeps its width, nothing leaves the axis. */
export function moveWindow(window: Span, part: Part, by: number, full: Span, least: number): Span {
  if (part === 'both') return shiftInside(window, by, full);
  if (part === 'lo') return [Math.min(window[1] - least, Math.max(full[0], window[0] + by)), window[1]];
  return [window[0], Math.max(window[0] + least, Math.min(full[1], window[1] + by))];
}

/** Two edges and the span between them, each a slider: drag, or arrow keys by one bin (Shift or Page keys by ten). */
export function BrushHandles({ brush, axis, full, view, rect, toAxis }: BrushHandlesProps) {
  const grabbed = useRef<{ at: number; window: Span } | null>(null);
  const name = brush.label ?? 'window';
  const bin = Math.abs(axis.step || 1);
  const window: Span = [brush.lo, brush.hi];
  const left = (at: number): number =>
    rect.left + ((Math.min(view[1], Math.max(view[0], at)) - view[0]) / (view[1] - view[0])) * rect.width;
  const say = (at: number): string => `${formatPosition(at, bin / 10)} ${displayUnit(axis.unit)}`;
  const set = (next: Span): void => {
    if (next[0] !== brush.lo || next[1] !== brush.hi) brush.onChange(next[0], next[1]);
  };
  const gestures = (part: Part) => ({
    onPointerDown: (event: PointerEvent) => {
      if (event.button !== 0) return;
      event.stopPropagation();
      event.currentTarget.setPointerCapture(event.pointerId);
      grabbed.current = { at: toAxis(event), window };
    },
    onPointerMove: (event: PointerEvent) => {
      const from = grabbed.current;
      if (from !== null) set(moveWindow(from.window, part, toAxis(event) - from.at, full, bin));
    },
    onPointerUp: () => {
      grabbed.current = null;
    },
    onDoubleClick: (event: { stopPropagation(): void }) => event.stopPropagation(),
    onKeyDown: (event: KeyboardEvent) => {
      const bins = KEY_BINS[event.key];
      if (bins === undefined) return;
      event.preventDefault();
      event.stopPropagation();
      set(moveWindow(window, part, bins * bin * (event.shiftKey ? 10 : 1), full, bin));
    },
  });
  const slider = (part: Part, label: string, at: number, text: string) => ({
    role: 'slider',
    tabIndex: 0,
    'aria-label': `${name}, ${label}`,
    'aria-valuemin': full[0],
    'aria-valuemax': full[1],
    'aria-valuenow': at,
    'aria-valuetext': text,
    'data-brush': part,
    ...gestures(part),
  });
  const [x0, x1] = [left(brush.lo), left(brush.hi)];
  const box = { top: rect.top, height: rect.height };
  const whole = `${say(brush.lo)} to ${say(brush.hi)}`;
  return (
    <>
      <div
        {...slider('both', 'centre', (brush.lo + brush.hi) / 2, whole)}
        className="absolute cursor-grab touch-none active:cursor-grabbing"
        style={{ ...box, left: x0, width: Math.max(1, x1 - x0) }}
      />
      {(['lo', 'hi'] as const).map((part) => {
        const at = brush[part];
        // An edge outside the zoomed view has nothing to grab.
        if (at < view[0] || at > view[1]) return null;
        return (
          <div
            key={part}
            {...slider(part, part === 'lo' ? 'start' : 'end', at, say(at))}
            className="absolute cursor-ew-resize touch-none"
            style={{ ...box, left: left(at) - GRAB_PX, width: 2 * GRAB_PX }}
          />
        );
      })}
    </>
  );
}
