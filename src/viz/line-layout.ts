import type { PlotRect } from './PlotAxes';
import type { Box } from './use-box';

export interface LineRects {
  main: PlotRect;
  /** Strip of residuals under the plot, sharing its axis. */
  strip: PlotRect | null;
}

/** Margins in text sizes; the left one is that of the maps, so that plots above each other line up. */
const MARGIN = { left: 5.6, right: 2.4, top: 0.6, bottom: 3.4 };
const STRIP = { height: 3.4, gap: 0.7 };

export function computeLineRects({ width, height, em }: Box, withStrip: boolean): LineRects {
  const left = Math.round(MARGIN.left * em);
  const top = Math.round(MARGIN.top * em);
  const plotWidth = Math.max(1, Math.floor(width - left - MARGIN.right * em));
  const inner = Math.max(1, Math.floor(height - top - MARGIN.bottom * em));
  const stripHeight = withStrip ? Math.min(Math.round(STRIP.height * em), Math.floor(inner / 3)) : 0;
  const gap = withStrip ? Math.round(STRIP.gap * em) : 0;
  const main = { left, top, width: plotWidth, height: Math.max(1, inner - stripHeight - gap) };
  if (!withStrip) return { main, strip: null };
  return { main, strip: { left, top: main.top + main.height + gap, width: plotWidth, height: stripHeight } };
}
