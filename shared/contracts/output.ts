/** What a study finds. The page draws it, the command line writes it, the server keeps it. */

export interface Quantity {
  value: number;
  /** 1-sigma standard error; null only where the number is a setting or an exact count. */
  sigma: number | null;
  unit: string;
  /** How the uncertainty was got, e.g. "block bootstrap, 64 blocks". */
  method: string;
  /** Sample size the value rests on (pairs, tags, frames). */
  n: number;
}

export type VerdictLevel = 'violated' | 'indicated' | 'inconclusive' | 'not-violated';

export interface Verdict {
  bound: number;
  side: 'below' | 'above';
  /** Standard deviations on the log scale, ln(bound/W)/(SE_W/W): the smaller and safer of the two. */
  significance: number;
  /** (bound - W)/SE_W, for comparison. */
  significanceLinear: number;
  /** Bootstrap 95 % interval of the value. */
  interval: [number, number];
  level: VerdictLevel;
  sentence: string;
}

export interface Check {
  id: string;
  status: 'pass' | 'caution' | 'fail';
  /** The number the question was decided on, null when there is none. */
  figure: number | null;
  unit: string;
  sentence: string;
}

export interface Axis {
  label: string;
  unit: string;
  /** Centre of the first bin. */
  start: number;
  step: number;
  arm?: 'signal' | 'idler' | 'pair';
}

/** Marginal covariance ellipse in axis units: centre and covariance. */
export interface Ellipse {
  x: number;
  y: number;
  xx: number;
  xy: number;
  yy: number;
}

/**
 * A 1-D or 2-D array with axes. For 2-D maps `shape` is [ny, nx], row-major, and `axes` is [x axis, y axis]
 * (the axis that runs fastest first). 1-D: shape [n], one axis.
 */
export interface MapData {
  label: string;
  shape: number[];
  axes: Axis[];
  unit: string;
  /** counts: sequential scale; signed: diverging scale centred on zero. */
  scale: 'counts' | 'signed';
  data: Float64Array;
  /** 1 where the bin is masked or undefined. */
  masked?: Uint8Array;
  /** 1-sigma error per bin. */
  sigma?: Float64Array;
  /** Fitted model at the same bins. */
  model?: Float64Array;
  ellipse?: Ellipse;
}

export interface StudyOutput {
  study: string;
  quantities: Record<string, Quantity>;
  verdicts: Record<string, Verdict>;
  checks: Check[];
  maps: Record<string, MapData>;
  /** Values the study chose for dials left to it, e.g. { window: 1400 }. */
  chosen: Record<string, number>;
  /** Paragraph a person can paste: what was done, under which assumptions. */
  statement: string;
}
