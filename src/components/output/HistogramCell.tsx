import { LinePlot } from '../../viz/LinePlot';
import { findWindow } from './dial-marks';
import { type CellProps, HEIGHTS, noteOf } from './MapCell';
import { splitVariant } from './quantity-words';

export interface HistogramCellProps extends CellProps {
  /** Pixels, where it does not stand on the stage. */
  height?: number;
}

/** A delay histogram with the coincidence window on it; the window is a dial where the bench gives one. */
export function HistogramCell(props: HistogramCellProps) {
  const { cell, note, specs, dials, onTurn, chosen, logScale, height = HEIGHTS.wide } = props;
  const { id, map } = cell;
  const part = splitVariant(id).base.replace(/^delay\.histogram\.?/, '');
  const axis = map.axes[0]!;
  const mark = findWindow(axis, part, specs, dials, chosen);
  const turn = mark?.turn ?? null;
  const hasModel = map.model !== undefined;
  const window =
    mark === null
      ? {}
      : onTurn !== undefined && turn !== null
        ? {
            brush: {
              lo: mark.lo,
              hi: mark.hi,
              centre: (mark.lo + mark.hi) / 2,
              label: part === '' ? 'window' : `window ${part}`,
              onChange: (lo: number, hi: number) => onTurn(turn(lo, hi)),
            },
          }
        : { bands: [{ lo: mark.lo, hi: mark.hi, tone: 'pair' as const, label: 'window' }] };
  return (
    <div data-map={id}>
      <LinePlot
        map={map}
        height={height}
        note={noteOf(cell, note)}
        style="steps"
        tone="pair"
        logY={logScale}
        showModel={hasModel}
        {...window}
      />
    </div>
  );
}
