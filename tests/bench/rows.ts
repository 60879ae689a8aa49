/** What is measured: one row each, with what it is held to. */

/** What is aimed at, and what must be reached at least. */
export interface Mark {
  goal: number;
  least: number;
}

export interface KernelRow {
  /** Name for `--only`; its adapter is `ours/<adapter>`. */
  name: string;
  kernel: string;
  unit: string;
  /** Items of the unit: 1e6 for millions. */
  per: number;
  items: number;
  /** What grows with the items in the growth of time; null when it is not followed. */
  growsIn: 'events' | 'frames' | null;
  /** Arguments of tests/bench/numpy/make_data.py after folder and items. */
  data: [kind: string, ...rest: string[]];
  adapter: string[];
  numpy: [script: string, ...rest: string[]] | null;
  cpp: [program: string, ...rest: string[]] | null;
  /** Script that gives the exact answer where the yardstick rounds; else the yardstick's answer is the reference. */
  reference?: [script: string, ...rest: string[]];
  /** Slow yardsticks do fewer items; its rate stands for all. */
  numpyItems?: number;
  /** Largest error against the reference over the largest value, each of `sections` parts apart; 0: equal. */
  tolerance: number;
  sections: number;
  numpyMark: Mark | null;
  cppMark: Mark | null;
}

const mark = (goal: number, least: number): Mark => ({ goal, least });
const counts = { tolerance: 0, sections: 1 };
const events = { unit: 'M events/s', per: 1e6, growsIn: 'events', ...counts } as const;
const records = { ...events, unit: 'M records/s' };
const images = { unit: 'frames/s', per: 1, growsIn: 'frames' } as const;
/** Single-precision transforms: 9e-8 of the largest value was seen. */
const maps = { ...images, tolerance: 3e-7, sections: 2 };

export const kernelRows: readonly KernelRow[] = [
  {
    ...records,
    name: 'decode-8',
    kernel: 'decode 8-byte records',
    items: 40_000_000,
    data: ['records_8'],
    adapter: ['decode', '8'],
    numpy: ['decode', '8'],
    cpp: ['decode', '8'],
    numpyMark: mark(3, 2),
    cppMark: mark(0.64, 0.4),
  },
  {
    ...records,
    name: 'decode-4',
    kernel: 'decode 4-byte records',
    items: 40_000_000,
    data: ['records_4'],
    adapter: ['decode', '4'],
    numpy: ['decode', '4'],
    cpp: ['decode', '4'],
    numpyMark: mark(5, 4),
    cppMark: mark(0.64, 0.5),
  },
  {
    ...events,
    name: 'histogram',
    kernel: 'delay histogram, all pairs',
    items: 16_000_000,
    data: ['histogram'],
    adapter: ['histogram'],
    numpy: ['histogram'],
    cpp: ['scan', 'histogram'],
    numpyMark: mark(6.5, 5),
    cppMark: mark(0.94, 0.8),
  },
  {
    ...events,
    name: 'matrix-merged',
    kernel: 'N x N matrix, merged stream',
    items: 24_000_000,
    data: ['matrix'],
    adapter: ['matrix-merged'],
    numpy: ['matrix_merged'],
    cpp: ['scan', 'merged'],
    numpyMark: mark(2.9, 2.2),
    cppMark: mark(0.7, 0.5),
  },
  {
    ...events,
    name: 'matrix-lists',
    kernel: 'N x N matrix, two lists',
    items: 16_000_000,
    data: ['matrix'],
    adapter: ['matrix-lists'],
    numpy: ['matrix_lists'],
    cpp: ['scan', 'lists'],
    numpyMark: mark(4.1, 3.5),
    cppMark: mark(1, 0.85),
  },
  {
    ...events,
    name: 'heralded',
    kernel: 'heralded image with accidental window',
    items: 16_000_000,
    data: ['heralded'],
    adapter: ['heralded'],
    numpy: ['heralded'],
    cpp: ['scan', 'heralded'],
    numpyMark: mark(6, 5),
    cppMark: mark(1, 0.85),
  },
  {
    ...maps,
    name: 'frames-256',
    kernel: 'frames 256 x 256, sum + difference maps',
    items: 768,
    data: ['frames', '256', '0.15'],
    adapter: ['frames', '256'],
    numpy: ['frames', '256', 'fast'],
    cpp: ['frames', '256'],
    reference: ['frames', '256', 'reference'],
    numpyMark: mark(3, 2.2),
    cppMark: mark(0.7, 0.55),
  },
  {
    ...maps,
    name: 'frames-128',
    kernel: 'frames 128 x 128, sum + difference maps',
    items: 3072,
    data: ['frames', '128', '0.15'],
    adapter: ['frames', '128'],
    numpy: ['frames', '128', 'fast'],
    cpp: ['frames', '128'],
    reference: ['frames', '128', 'reference'],
    numpyMark: mark(3.8, 3),
    cppMark: mark(0.5, 0.4),
  },
  ...([256, 128] as const).map((side): KernelRow => {
    const items = side === 256 ? 768 : 3072;
    return {
      ...maps,
      name: `frames-${side}-plain`,
      kernel: `frames ${side} x ${side}, against fftconvolve frame by frame`,
      items,
      numpyItems: side === 256 ? 17 : 65,
      growsIn: null,
      data: ['frames', String(side), '0.15'],
      adapter: ['frames', String(side)],
      numpy: ['frames_plain', String(side)],
      cpp: null,
      numpyMark: mark(30, 30),
      cppMark: null,
    };
  }),
  {
    ...maps,
    name: 'frames-sparse',
    kernel: 'sparse frames 256 x 256, sum + difference maps',
    items: 2048,
    numpyItems: 256,
    data: ['counts', '256', '0.005'],
    adapter: ['frames', '256'],
    numpy: ['frames', '256', 'fast'],
    cpp: ['sparse', '256'],
    reference: ['frames', '256', 'reference'],
    numpyMark: null,
    cppMark: mark(0.9, 0.7),
  },
  {
    ...images,
    ...counts,
    name: 'joint-sparse',
    kernel: 'joint distribution 64 x 64, sparse',
    items: 10_000,
    data: ['counts', '64', '0.02'],
    adapter: ['joint', '64'],
    numpy: ['joint_sparse', '64'],
    cpp: null,
    numpyMark: mark(3, 2.5),
    cppMark: null,
  },
  {
    ...images,
    name: 'joint-dense',
    kernel: 'joint distribution 64 x 64, dense',
    items: 1024,
    tolerance: 1e-6,
    sections: 1,
    data: ['frames', '64', '0.15'],
    adapter: ['joint', '64'],
    numpy: ['joint_dense', '64'],
    cpp: null,
    numpyMark: mark(0.35, 0.22),
    cppMark: null,
  },
  {
    name: 'bootstrap',
    kernel: 'bootstrap of fitted widths, 1000 resamples',
    unit: 'resamples/s',
    per: 1,
    items: 1000,
    growsIn: null,
    // Single-precision sums of the yardstick and the ends of two different iterations.
    tolerance: 1e-4,
    sections: 1,
    data: ['bootstrap', '50', '64'],
    adapter: ['bootstrap', '50', '64'],
    numpy: ['bootstrap', '50', '64'],
    cpp: null,
    numpyMark: mark(10, 4),
    cppMark: null,
  },
];
