import { type KeyboardEvent, type PointerEvent, useRef } from 'react';
import type { Axis } from '../../shared/contracts/output';
import { displayUnit } from '../lib/format-number';
import { type Span, shiftInside } from './axis-geometry';
import { formatPosition, roundPosition } from './format-tick';
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

/** Least width of what can be grabbed, in CSS pixels (WCAG 2.2, 2.5.8). */
const GRAB_PX = 24;
/** How far the handle of an edge reaches into the window, where the window has room for it. */
const INSIDE_PX = 6;
/** How far the last handle may stand out over the plot, inside its right margin. */
const MARGIN_PX = 14;

interface GrabBox {
  left: number;
  width: number;
}

/** What is grabbed for a window drawn from x0 to x1: each part wide enough, none over another. */
export function grabBoxes(x0: number, x1: number, rect: PlotRect): Record<Part, GrabBox> {
  const width = Math.max(GRAB_PX, x1 - x0);
  const left = (x0 + x1 - width) / 2;
  const inside = Math.min(INSIDE_PX, (width - GRAB_PX) / 2);
  const hi = Math.min(left + width - inside, rect.left + rect.width + MARGIN_PX - GRAB_PX);
  const both = Math.min(left + inside, hi - GRAB_PX);
  return {
    lo: { left: both - GRAB_PX, width: GRAB_PX },
    both: { left: both, width: hi - both },
    hi: { left: hi, width: GRAB_PX },
  };
}

const KEY_BINS: Record<string, number> = {
  ArrowLeft: -1,
  ArrowDown: -1,
  ArrowRight: 1,
  ArrowUp: 1,
  PageDown: -10,
  PageUp: 10,
  Home: -Infinity,
  End: Infinity,
};

/** The window with one part moved: the edges never cross, the whole keeps its width, nothing leaves the axis. */
export function moveWindow(window: Span, part: Part, by: number, full: Span, least: number): Span {
  if (part === 'both') return shiftInside(window, by, full);
  if (part === 'lo') return [Math.min(window[1] - least, Math.max(full[0], window[0] + by)), window[1]];
  return [window[0], Math.max(window[0] + least, Math.min(full[1], window[1] + by))];
}

/** Two edges and the span between them, each a slider: drag, or arrow keys by one bin (Shift or Page keys by ten), Home and End
 * as far as it goes. */
export function BrushHandles({ brush, axis, full, view, rect, toAxis }: BrushHandlesProps) {
  const grabbed = useRef<{ at: number; window: Span } | null>(null);
  const name = brush.label ?? 'window';
  const bin = Math.abs(axis.step || 1);
  const window: Span = [brush.lo, brush.hi];
  const left = (at: number): number =>
    rect.left + ((Math.min(view[1], Math.max(view[0], at)) - view[0]) / (view[1] - view[0])) * rect.width;
  const digit = bin / 10;
  const say = (at: number): string => `${formatPosition(at, digit)} ${displayUnit(axis.unit)}`;
  const set = (next: Span): void => {
    if (next[0] !== brush.lo || next[1] !== brush.hi) brush.onChange(next[0], next[1]);
  };
  const letGo = (): void => {
    grabbed.current = null;
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
    onPointerUp: letGo,
    onPointerCancel: letGo,
    onLostPointerCapture: letGo,
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
    'aria-valuemin': roundPosition(full[0], digit),
    'aria-valuemax': roundPosition(full[1], digit),
    'aria-valuenow': roundPosition(at, digit),
    'aria-valuetext': text,
    'data-brush': part,
    ...gestures(part),
  });
  const boxes = grabBoxes(left(brush.lo), left(brush.hi), rect);
  const box = { top: rect.top, height: rect.height };
  const whole = `${say(brush.lo)} to ${say(brush.hi)}`;
  return (
    <>
      <div
        {...slider('both', 'centre', (brush.lo + brush.hi) / 2, whole)}
        className="absolute cursor-grab touch-none active:cursor-grabbing"
        style={{ ...box, ...boxes.both }}
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
            style={{ ...box, ...boxes[part] }}
          />
        );
      })}
    </>
  );
}
