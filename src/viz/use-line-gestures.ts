import { type KeyboardEvent, type PointerEvent, type RefObject, useEffect, useRef, useState } from 'react';
import type { MapData } from '../../shared/contracts/output';
import { axisSpan, binCentre, nearestBin, type Span, shiftInside, zoomSpan } from './axis-geometry';
import { readMapKey } from './map-keys';
import { isInside } from './map-layout';
import { moveBin } from './map-region';
import type { PlotRect } from './PlotAxes';
import type { LinePlotProps } from './types';
import { wheelFactor } from './use-map-view';

/** Smallest view in bins. */
const CLOSEST_BINS = 6;

/** What part of the axis is shown; starts whole again on another axis. */
function useSpan(full: Span) {
  const [state, setState] = useState<{ view: Span; of: Span } | null>(null);
  const isCurrent = state !== null && state.of[0] === full[0] && state.of[1] === full[1];
  const view = isCurrent ? state.view : full;
  const apply = (next: Span): void =>
    setState(next[0] <= full[0] && next[1] >= full[1] ? null : { view: next, of: full });
  return { view, apply, isZoomed: view !== full };
}

function useCursorBin({ map, cursor, onCursor }: LinePlotProps) {
  const [own, setOwn] = useState<number | null>(null);
  const at = cursor === undefined ? own : cursor;
  const move = (bin: number | null): void => {
    const next = bin === null ? null : binCentre(map.axes[0]!, bin);
    if (next === at) return;
    setOwn(next);
    onCursor?.(next);
  };
  return { at, move };
}

/** A 1-D map as one row, for the rules shared with 2-D maps. */
function asRow(map: MapData): MapData {
  const flat = { label: '', unit: '', start: 0, step: 1 };
  return { ...map, shape: [1, map.shape[0] ?? 0], axes: [map.axes[0]!, flat] };
}

/** Hover reads, wheel zooms the axis, drag pans, arrows move the cursor, plus, minus and 0 zoom. */
export function useLineGestures(props: LinePlotProps, host: RefObject<HTMLElement | null>, rect: PlotRect) {
  const { map } = props;
  const axis = map.axes[0]!;
  const bins = map.shape[0] ?? 0;
  const full = axisSpan(axis, bins);
  const { view, apply, isZoomed } = useSpan(full);
  const { at, move } = useCursorBin(props);
  const [moves, setMoves] = useState(0);
  const panFrom = useRef<number | null>(null);

  const zoom = (about: number, factor: number): void =>
    apply(zoomSpan(view, about, factor, full, CLOSEST_BINS * Math.abs(axis.step || 1)));
  const toAxis = (px: number): number => view[0] + ((px - rect.left) / rect.width) * (view[1] - view[0]);
  const locate = (event: { clientX: number; clientY: number }): { px: number; py: number } => {
    const bounds = host.current?.getBoundingClientRect();
    return { px: event.clientX - (bounds?.left ?? 0), py: event.clientY - (bounds?.top ?? 0) };
  };

  const onWheel = (event: WheelEvent): void => {
    const { px, py } = locate(event);
    const factor = wheelFactor(event);
    if (!isInside(rect, px, py) || (factor > 1 && !isZoomed)) return;
    event.preventDefault();
    zoom(toAxis(px), factor);
  };
  const latest = useRef(onWheel);
  latest.current = onWheel;
  useEffect(() => {
    const element = host.current;
    const listen = (event: WheelEvent): void => latest.current(event);
    element?.addEventListener('wheel', listen, { passive: false });
    return () => element?.removeEventListener('wheel', listen);
  }, [host]);

  const onKeyDown = (event: KeyboardEvent): void => {
    const action =
      event.ctrlKey || event.metaKey || event.altKey ? null : readMapKey(event.key, event.shiftKey);
    if (action === null || action.kind === 'act' || (action.kind === 'leave' && at === null)) return;
    if (action.kind === 'move' && action.dx === 0) return;
    event.preventDefault();
    event.stopPropagation();
    if (action.kind === 'move') {
      move(moveBin(asRow(map), at === null ? null : { x: at, y: 0 }, action.dx, 0).ix);
      setMoves(moves + 1);
    } else if (action.kind === 'zoom') zoom(at ?? (view[0] + view[1]) / 2, action.factor);
    else if (action.kind === 'reset') apply(full);
    else move(null);
  };
  const onPointerMove = (event: PointerEvent): void => {
    const { px, py } = locate(event);
    if (panFrom.current !== null) {
      apply(shiftInside(view, ((panFrom.current - px) / rect.width) * (view[1] - view[0]), full));
      panFrom.current = px;
    }
    move(isInside(rect, px, py) ? nearestBin(axis, bins, toAxis(px)) : null);
  };
  return {
    view,
    cursorBin: at === null || at < full[0] || at > full[1] ? null : nearestBin(axis, bins, at),
    /** True once the cursor was moved by keys: only those moves are announced. */
    byKeys: moves > 0,
    toAxis,
    locate,
    handlers: {
      onKeyDown,
      onPointerMove,
      onPointerDown: (event: PointerEvent) => {
        const { px, py } = locate(event);
        if (event.button !== 0 || !isZoomed || !isInside(rect, px, py)) return;
        event.currentTarget.setPointerCapture(event.pointerId);
        panFrom.current = px;
      },
      onPointerUp: () => {
        panFrom.current = null;
      },
      onPointerLeave: () => {
        if (panFrom.current === null) move(null);
      },
      onDoubleClick: () => apply(full),
    },
  };
}
