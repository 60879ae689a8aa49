import { useState } from 'react';
import type { DialSpec, DialValues } from '../../../shared/contracts/dial';
import { displayUnit } from '../../lib/format-number';
import { LinePlot } from '../../viz/LinePlot';
import type { Theme, Tone } from '../../viz/types';
import type { Cell } from './arrange-maps';
import { HistogramCell } from './HistogramCell';
import { ImageCell } from './ImageCell';
import { splitVariant, VARIANT_WORDS } from './quantity-words';
import { SliceOfMap } from './SliceOfMap';
import { StageMap, usePresentable } from './StageMap';
import type { LinkedCursor } from './use-linked-cursor';

export interface CellContext {
  theme: Theme;
  note: string | null;
  specs: readonly DialSpec[];
  dials: DialValues;
  onTurn: ((values: DialValues) => void) | undefined;
  cursor: LinkedCursor | null;
  logScale: boolean;
  chosen: Record<string, number>;
}

export type CellProps = CellContext & { cell: Cell };

/** Heights in pixels of the plots, by what one reads from them. */
export const HEIGHTS = { wide: 300, line: 210, projection: 250 } as const;

export function noteOf({ id, map }: Cell, note: string | null): string {
  const { variant } = splitVariant(id);
  // The study's own caption may say it already.
  const isSaid = /subtracted|removed|raw/i.test(map.label);
  const variantWords = variant === null || isSaid ? '' : VARIANT_WORDS[variant];
  const parts = [displayUnit(map.unit), variantWords, note ?? ''];
  return parts.filter((part) => part !== '').join(' · ');
}

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
