import { type KeyboardEvent, type PointerEvent, type RefObject, useRef, useState } from 'react';
import { readMapKey } from './map-keys';
import { isInside, pixelToPoint } from './map-layout';
import { type Bin, binOf, centreOf, moveBin, regionBetween } from './map-region';
import { describePoint } from './map-values';
import type { PlotRect } from './PlotAxes';
import type { HeatMapProps, PlotPoint, PlotRegion } from './types';
import type { MapViewControl } from './use-map-view';

/** A press that moves less than this is a click. */
const CLICK_PX = 4;

interface Drag {
  startX: number;
  startY: number;
  lastX: number;
  lastY: number;
  moved: boolean;
  /** Corner of the region being drawn; null while panning. */
  from: Bin | null;
}

export interface MapGestures {
  cursor: PlotPoint | null;
  draft: PlotRegion | null;
  announcement: string;
  handlers: {
    onPointerMove(event: PointerEvent): void;
    onPointerDown(event: PointerEvent): void;
    onPointerUp(event: PointerEvent): void;
    onPointerLeave(): void;
    onDoubleClick(): void;
    onKeyDown(event: KeyboardEvent): void;
  };
}

/** Cursor of the map: the parent's when it links several maps, else its own. Snaps to the centre of a bin. */
function useCursor({ map, crosshair, onCrosshair }: HeatMapProps) {
  const [own, setOwn] = useState<PlotPoint | null>(null);
  const cursor = crosshair === undefined ? own : crosshair;
  const move = (bin: Bin | null): void => {
    const next = bin === null ? null : centreOf(map, bin);
    if (next?.x === cursor?.x && next?.y === cursor?.y) return;
    setOwn(next);
    onCrosshair?.(next);
  };
  return { cursor, move };
}

/** Hover reads, click picks, drag pans (or draws with a tool), arrows move, Enter picks (or sets a corner). */
export function useMapGestures(
  props: HeatMapProps,
  host: RefObject<HTMLElement | null>,
  rect: PlotRect,
  control: MapViewControl,
): MapGestures {
  const { map, tool, onPick } = props;
  const { cursor, move } = useCursor(props);
  const [corner, setCorner] = useState<Bin | null>(null);
  const [draft, setDraft] = useState<PlotRegion | null>(null);
  const [announcement, setAnnouncement] = useState('');
  const drag = useRef<Drag | null>(null);

  const locate = (event: PointerEvent): { px: number; py: number } => {
    const bounds = host.current?.getBoundingClientRect();
    return { px: event.clientX - (bounds?.left ?? 0), py: event.clientY - (bounds?.top ?? 0) };
  };
  const binUnder = (px: number, py: number): Bin => binOf(map, pixelToPoint(control.view, rect, px, py));
  const clearRegion = (): void => {
    setCorner(null);
    setDraft(null);
  };
  const finishRegion = (from: Bin, to: Bin): void => {
    clearRegion();
    tool?.onRegion(regionBetween(map, from, to));
  };

  const onDrag = (active: Drag, px: number, py: number): void => {
    active.moved ||= Math.hypot(px - active.startX, py - active.startY) >= CLICK_PX;
    if (!active.moved) return;
    if (active.from !== null) setDraft(regionBetween(map, active.from, binUnder(px, py)));
    else {
      const { view } = control;
      const dx = ((active.lastX - px) / rect.width) * (view.x[1] - view.x[0]);
      const dy = ((py - active.lastY) / rect.height) * (view.y[1] - view.y[0]);
      control.panBy(dx, dy);
    }
    active.lastX = px;
    active.lastY = py;
  };
  const act = (): void => {
    if (cursor === null) return;
    const bin = binOf(map, cursor);
    if (!tool) onPick?.(bin.ix, bin.iy);
    else if (corner === null) {
      setCorner(bin);
      setDraft(regionBetween(map, bin, bin));
      setAnnouncement(`First corner of ${tool.label} set. Move and press Enter for the second.`);
    } else finishRegion(corner, bin);
  };

  return {
    cursor,
    draft: tool ? draft : null,
    announcement,
    handlers: {
      onPointerMove: (event) => {
        const { px, py } = locate(event);
        if (drag.current !== null) onDrag(drag.current, px, py);
        move(isInside(rect, px, py) ? binUnder(px, py) : null);
      },
      onPointerDown: (event) => {
        const { px, py } = locate(event);
        if (event.button !== 0 || !isInside(rect, px, py)) return;
        event.currentTarget.setPointerCapture(event.pointerId);
        const from = tool ? binUnder(px, py) : null;
        drag.current = { startX: px, startY: py, lastX: px, lastY: py, moved: false, from };
      },
      onPointerUp: (event) => {
        const active = drag.current;
        drag.current = null;
        if (active === null) return;
        const { px, py } = locate(event);
        const bin = binUnder(px, py);
        if (active.from !== null) finishRegion(active.from, bin);
        else if (!active.moved) onPick?.(bin.ix, bin.iy);
      },
      onPointerLeave: () => {
        if (drag.current === null) move(null);
      },
      onDoubleClick: control.reset,
      onKeyDown: (event) => {
        const action =
          event.ctrlKey || event.metaKey || event.altKey ? null : readMapKey(event.key, event.shiftKey);
        if (action === null) return;
        // Escape with nothing to leave belongs to what is around the map.
        if (action.kind === 'leave' && cursor === null && corner === null) return;
        event.preventDefault();
        event.stopPropagation();
        if (action.kind === 'move') {
          const bin = moveBin(map, cursor, action.dx, action.dy);
          move(bin);
          if (corner !== null) setDraft(regionBetween(map, corner, bin));
          setAnnouncement(describePoint(map, centreOf(map, bin)) ?? '');
        } else if (action.kind === 'act') act();
        else if (action.kind === 'reset') control.reset();
        else if (action.kind === 'leave') {
          clearRegion();
          move(null);
        } else {
          const { view } = control;
          const middle = { x: (view.x[0] + view.x[1]) / 2, y: (view.y[0] + view.y[1]) / 2 };
          control.zoomAbout(cursor ?? middle, action.factor);
        }
      },
    },
  };
}
