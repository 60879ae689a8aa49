import type { ReactNode } from 'react';
import type { MapData } from '../../shared/contracts/output';

export type Theme = 'bench' | 'projector';

/** One hue a meaning; always doubled by a label or a shape. */
export type Tone = 'signal' | 'idler' | 'pair' | 'accidental' | 'warn' | 'fail';

/** A position in axis units. */
export interface PlotPoint {
  x: number;
  y: number;
}

/** A rectangle in axis units, x0 <= x1 and y0 <= y1, edges included. */
export interface PlotRegion {
  x0: number;
  y0: number;
  x1: number;
  y1: number;
}

export interface RegionMark {
  label: string;
  region: PlotRegion;
  tone: Tone;
}

export interface RegionTool {
  /** Said in the read-out while drawing, e.g. "bright region". */
  label: string;
  onRegion(region: PlotRegion): void;
}

export interface HeatMapProps {
  map: MapData;
  theme: Theme;
  /** Pixels; without it the map fills its box. */
  height?: number;
  /** Caption; the map's label when left out, none when null. */
  title?: string | null;
  /** What kind of numbers these are, at the right of the caption, e.g. "pairs · accidentals subtracted". */
  note?: ReactNode;
  /** Given (even null): the parent links the cursor. Left out: the map keeps its own. */
  crosshair?: PlotPoint | null;
  onCrosshair?(point: PlotPoint | null): void;
  onPick?(ix: number, iy: number): void;
  tool?: RegionTool | null;
  regions?: readonly RegionMark[];
  logScale?: boolean;
  /** Fixed ends of the colour scale; values outside are clipped and the colour bar says so. */
  range?: readonly [number, number];
}

export interface Brush {
  lo: number;
  hi: number;
  centre: number;
  onChange(lo: number, hi: number): void;
  /** What is brushed, for the handles' names; "window" when left out. */
  label?: string;
}

export interface Band {
  lo: number;
  hi: number;
  tone: Tone;
  label: string;
}

export interface LinePlotProps {
  map: MapData;
  /** Pixels; without it the plot fills its box. */
  height?: number;
  title?: string | null;
  note?: ReactNode;
  style: 'steps' | 'points' | 'line';
  showModel?: boolean;
  showResiduals?: boolean;
  brush?: Brush;
  bands?: readonly Band[];
  marks?: readonly { at: number; label: string }[];
  tone: Exclude<Tone, 'warn' | 'fail'>;
  logY?: boolean;
  /** Linked cursor on the axis, as for the maps. */
  cursor?: number | null;
  onCursor?(at: number | null): void;
}

export interface RulerEntry {
  label: 'raw' | 'accidentals subtracted';
  value: number;
  sigma: number | null;
  interval: readonly [number, number];
  unit: string;
}

export interface BoundRulerProps {
  entries: readonly RulerEntry[];
  bounds: readonly { name: string; value: number; unit: string }[];
  sentence: string;
  title?: string | null;
  /** Second, dimmer sentence: the assumptions. */
  assumption?: string;
  /** Side of the bound that breaks it; shaded up to the strictest bound. */
  side?: 'below' | 'above';
}

export interface RateStripProps {
  /** One line a series, in this order from the top; each on its own scale from zero. */
  series: readonly { tone: Tone; label: string; values: ArrayLike<number> }[];
  /** Text alternative, e.g. "Rates over 600 s: signal 41.2 k/s, idler 38.0 k/s". */
  label: string;
  height?: number;
}
