import { type RefObject, useEffect, useRef, useState } from 'react';
import { shiftInside, zoomSpan } from './axis-geometry';
import { isInside, type MapView, pixelToPoint } from './map-layout';
import type { PlotRect } from './PlotAxes';
import type { PlotPoint } from './types';

export interface MapViewControl {
  view: MapView;
  isZoomed: boolean;
  zoomAbout(point: PlotPoint, factor: number): void;
  panBy(dx: number, dy: number): void;
  reset(): void;
}

/** Smallest view in bins a side. */
const CLOSEST_BINS = 4;

function isSame(a: MapView, b: MapView): boolean {
  return a.x[0] === b.x[0] && a.x[1] === b.x[1] && a.y[0] === b.y[0] && a.y[1] === b.y[1];
}

/** What part of the map is shown. A map with other axes starts whole again; new data on the same axes keep the view. */
export function useMapView(full: MapView, binSize: { x: number; y: number }): MapViewControl {
  const [state, setState] = useState<{ view: MapView; of: MapView } | null>(null);
  const view = state !== null && isSame(state.of, full) ? state.view : full;
  const apply = (next: MapView): void => setState(isSame(next, full) ? null : { view: next, of: full });
  return {
    view,
    isZoomed: view !== full,
    zoomAbout: (point, factor) => {
      // Both axes keep one factor, or the aspect would drift at the limits.
      const least = Math.max(
        (CLOSEST_BINS * binSize.x) / (view.x[1] - view.x[0]),
        (CLOSEST_BINS * binSize.y) / (view.y[1] - view.y[0]),
      );
      const most = (full.x[1] - full.x[0]) / (view.x[1] - view.x[0]);
      const by = Math.min(most, Math.max(Math.min(1, least), factor));
      apply({
        x: zoomSpan(view.x, point.x, by, full.x, 0),
        y: zoomSpan(view.y, point.y, by, full.y, 0),
      });
    },
    panBy: (dx, dy) => apply({ x: shiftInside(view.x, dx, full.x), y: shiftInside(view.y, dy, full.y) }),
    reset: () => setState(null),
  };
}

/** Factor of one wheel event; the same for notched wheels and touch pads. */
export function wheelFactor(event: WheelEvent): number {
  const lines = event.deltaMode === WheelEvent.DOM_DELTA_LINE ? 16 : 1;
  return Math.exp(Math.max(-0.5, Math.min(0.5, event.deltaY * lines * 0.0025)));
}

/** Zooms about the pointer. React's wheel listeners are passive and could not keep the page from scrolling. */
export function useWheelZoom(
  host: RefObject<HTMLElement | null>,
  rect: PlotRect,
  control: MapViewControl,
): void {
  const latest = useRef({ rect, control });
  latest.current = { rect, control };
  useEffect(() => {
    const element = host.current;
    if (element === null) return;
    const onWheel = (event: WheelEvent): void => {
      const { rect, control } = latest.current;
      const bounds = element.getBoundingClientRect();
      const [px, py] = [event.clientX - bounds.left, event.clientY - bounds.top];
      const factor = wheelFactor(event);
      // A whole map cannot shrink: the page scrolls on.
      if (!isInside(rect, px, py) || (factor > 1 && !control.isZoomed)) return;
      event.preventDefault();
      control.zoomAbout(pixelToPoint(control.view, rect, px, py), factor);
    };
    element.addEventListener('wheel', onWheel, { passive: false });
    return () => element.removeEventListener('wheel', onWheel);
  }, [host]);
}
