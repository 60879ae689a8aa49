import { useState } from 'react';
import { LinePlot } from '../../viz/LinePlot';
import type { Tone } from '../../viz/types';
import { type CellProps, HEIGHTS, noteOf } from './cell-context';
import { HistogramCell } from './HistogramCell';
import { ImageCell } from './ImageCell';
import { SliceOfMap } from './SliceOfMap';
import { StageMap, usePresentable } from './StageMap';

function toneOf(id: string): Exclude<Tone, 'warn' | 'fail'> {
  const parts = id.split('.');
  if (parts.includes('signal')) return 'signal';
  if (parts.includes('idler')) return 'idler';
  return parts.includes('accidentals') ? 'accidental' : 'pair';
}

/** One map of the stage, drawn and handled as its kind asks. */
export function MapCell(props: CellProps) {
  const { cell } = props;
  switch (cell.kind) {
    case 'histogram':
      return <HistogramCell {...props} />;
    case 'image':
      return <ImageCell {...props} />;
    case 'joint':
      return <JointCell {...props} />;
    case 'map':
      return <PlainMap {...props} />;
    default:
      return <PlainLine {...props} />;
  }
}

function PlainMap({ cell, theme, note, cursor, logScale }: CellProps) {
  const map = usePresentable(cell.map);
  return (
    <div data-map={cell.id}>
      <StageMap
        map={map}
        theme={theme}
        note={noteOf(cell, note)}
        logScale={logScale}
        crosshair={cursor?.pointFor(map) ?? null}
        onCrosshair={(point) => cursor?.move(map, point)}
      />
    </div>
  );
}

function JointCell({ cell, theme, note, cursor, logScale }: CellProps) {
  const map = usePresentable(cell.map);
  const [picked, setPicked] = useState<{ ix: number; iy: number } | null>(null);
  return (
    <div data-map={cell.id} className="flex flex-col gap-3">
      <StageMap
        map={map}
        theme={theme}
        note={noteOf(cell, note)}
        logScale={logScale}
        crosshair={cursor?.pointFor(map) ?? null}
        onCrosshair={(point) => cursor?.move(map, point)}
        onPick={(ix, iy) => setPicked({ ix, iy })}
      />
      {picked === null ? (
        <p className="text-xs text-dim">Click the map, or press Enter on it, for the conditional slice.</p>
      ) : (
        <SliceOfMap map={cell.map} {...picked} onClose={() => setPicked(null)} />
      )}
    </div>
  );
}

function PlainLine({ cell, note, cursor }: CellProps) {
  const { id, map, kind } = cell;
  const hasModel = map.model !== undefined;
  const isProjection = kind === 'projection';
  return (
    <div data-map={id}>
      <LinePlot
        map={map}
        height={isProjection ? HEIGHTS.projection : HEIGHTS.line}
        note={noteOf(cell, note)}
        style={isProjection ? 'points' : 'line'}
        tone={toneOf(id)}
        showModel={hasModel}
        showResiduals={isProjection && hasModel && map.sigma !== undefined}
        cursor={cursor?.pointFor(map)?.x ?? null}
        onCursor={(at) => cursor?.move(map, at === null ? null : { x: at, y: 0 })}
      />
    </div>
  );
}
