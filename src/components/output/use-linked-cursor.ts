import { useCallback, useState } from 'react';
import type { MapData } from '../../../shared/contracts/output';
import type { PlotPoint } from '../../viz/types';

/** Maps over the same ranges in the same units show the same cursor. */
function geometryOf(map: MapData): string {
  return map.axes.map(({ unit, start, step }, i) => `${unit} ${start} ${step} ${map.shape[i]}`).join('|');
}

export interface LinkedCursor {
  pointFor(map: MapData): PlotPoint | null;
  move(map: MapData, point: PlotPoint | null): void;
}

export function useLinkedCursor(): LinkedCursor {
  const [state, setState] = useState<{ geometry: string; point: PlotPoint } | null>(null);
  const move = useCallback(
    (map: MapData, point: PlotPoint | null) =>
      setState(point === null ? null : { geometry: geometryOf(map), point }),
    [],
  );
  return {
    pointFor: (map) => (state !== null && state.geometry === geometryOf(map) ? state.point : null),
    move,
  };
}
