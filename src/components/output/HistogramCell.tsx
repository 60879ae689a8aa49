import { useMemo, useRef, useState } from 'react';
import { LinePlot } from '../../viz/LinePlot';
import { Button } from '../ui/Button';
import { type CellProps, HEIGHTS, noteOf } from './cell-context';
import { cropLine } from './crop-line';
import { findWindow, type WindowMark } from './dial-marks';
import { splitVariant } from './quantity-words';

export interface HistogramCellProps extends CellProps {
  /** Pixels, where it does not stand on the stage. */
  height?: number;
}

/** Window widths shown to either side of the window, unless the whole histogram is asked for. */
const WIDTHS_SHOWN = 4;

type Span = readonly [number, number];

/** Where to look first: about the window. It stays while the hand moves the window inside it. */
function useFocus(mark: WindowMark | null): Span | null {
  const held = useRef<Span | null>(null);
  if (mark === null) return null;
  const width = mark.hi - mark.lo;
  const now = held.current;
  const isInside = now !== null && mark.lo > now[0] && mark.hi < now[1] && width * 40 > now[1] - now[0];
  if (!isInside) held.current = [mark.lo - WIDTHS_SHOWN * width, mark.hi + WIDTHS_SHOWN * width];
  return held.current;
}

/** A delay histogram with the coincidence window on it; the window is a dial where the bench gives one. */
export function HistogramCell(props: HistogramCellProps) {
  const { cell, note, specs, dials, onTurn, turnCost, chosen, logScale, height = HEIGHTS.wide } = props;
  const { id, map } = cell;
  const part = splitVariant(id).base.replace(/^delay\.histogram\.?/, '');
  const mark = findWindow(map.axes[0]!, part, specs, dials, chosen);
  const [isWhole, setWhole] = useState(false);
  const focus = useFocus(mark);
  const shown = useMemo(
    () => (isWhole || focus === null ? map : cropLine(map, focus)),
    [map, isWhole, focus],
  );
  return (
    <div data-map={id}>
      <LinePlot
        map={shown}
        height={height}
        note={
          <span className="inline-flex items-center gap-2">
            {focus === null ? null : (
              <Button size="sm" variant="quiet" onClick={() => setWhole(!isWhole)}>
                {isWhole ? 'Show the peak' : 'Show the whole range'}
              </Button>
            )}
            {onTurn === undefined || mark?.turn == null || turnCost === null ? null : <span>{turnCost}</span>}
            <span>{noteOf(cell, note)}</span>
          </span>
        }
        style="steps"
        tone="pair"
        logY={logScale}
        showModel={map.model !== undefined}
        {...windowOf(mark, part, onTurn)}
      />
    </div>
  );
}

/** A brush where the window can be turned, a band where it only stands. */
function windowOf(mark: WindowMark | null, part: string, onTurn: CellProps['onTurn']) {
  if (mark === null) return {};
  const { lo, hi, turn } = mark;
  if (onTurn === undefined || turn === null)
    return { bands: [{ lo, hi, tone: 'pair' as const, label: 'window' }] };
  return {
    brush: {
      lo,
      hi,
      centre: (lo + hi) / 2,
      label: part === '' ? 'window' : `window ${part}`,
      onChange: (from: number, to: number) => onTurn(turn(from, to)),
    },
  };
}
