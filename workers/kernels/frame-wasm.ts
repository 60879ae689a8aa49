import type { WasmModule } from './wasm-module';

/** What `wasm/frames.ts` exports; addresses and counts are numbers. */
export interface FrameExports {
  prepareFrame(
    type: number,
    from: number,
    width: number,
    height: number,
    columns: number,
    mask: number,
    to: number,
    double: number,
    offset: number,
    counting: number,
    threshold: number,
    squares: number,
  ): number;
  scaleFrame(at: number, n: number, factor: number): void;
  resampleMaps(
    maps: number,
    blocks: number,
    cells: number,
    weights: number,
    resamples: number,
    out: number,
  ): void;
  addSums(
    double: number,
    slots: number,
    slotBytes: number,
    from: number,
    count: number,
    columns: number,
    rows: number,
    sum: number,
    sumSquares: number,
    diagonal: number,
    across: number,
    down: number,
    downBytes: number,
    scratch: number,
  ): void;
  listLit(
    slot: number,
    columns: number,
    rows: number,
    pad: number,
    limit: number,
    list: number,
    span: number,
    squares: number,
  ): number;
  addOwnPairs(
    list: number,
    n: number,
    span: number,
    weight: number,
    ones: number,
    plus: number,
    middle: number,
  ): void;
  takeCrossPairs(
    a: number,
    countA: number,
    b: number,
    countB: number,
    span: number,
    ones: number,
    plus: number,
    middle: number,
  ): void;
  addListSums(
    now: number,
    countNow: number,
    next: number,
    countNext: number,
    span: number,
    slot: number,
    fresh: number,
    columns: number,
    sum: number,
    sumSquares: number,
    diagonal: number,
    across: number,
    down: number,
  ): void;
  flushPairs(
    pairs: number,
    middle: number,
    pairsBytes: number,
    width: number,
    height: number,
    pad: number,
    plus: number,
    minus: number,
  ): void;
  packDifferences(rows: number, count: number, n: number, panels: number): void;
  addJoint(panels: number, count: number, n: number, joint: number): void;
  addJointPairs(
    lists: number,
    listBytes: number,
    counts: number,
    frames: number,
    ones: number,
    cross: number,
    joint: number,
    n: number,
    heads: number,
    starts: number,
    links: number,
  ): void;
  addOuters(vectors: number, count: number, n: number, joint: number): void;
  transformColumnsF32: TransformColumns;
  transformColumnsF64: TransformColumns;
  addSquares(
    from: number,
    frames: number,
    strips: number,
    padWidth: number,
    twiddles: number,
    work: number,
    sums: number,
    stripBytes: number,
    frameBytes: number,
  ): void;
  addProduct(
    from: number,
    strips: number,
    padWidth: number,
    twiddles: number,
    work: number,
    other: number,
    sums: number,
    stripBytes: number,
    frameBytes: number,
  ): void;
  flushSquares(sums: number, totals: number, n: number): void;
  invertSquares(
    totals: number,
    width: number,
    height: number,
    padWidth: number,
    padHeight: number,
    twiddlesX: number,
    twiddlesY: number,
    positionsX: number,
    positionsY: number,
    work: number,
    field: number,
    plus: number,
    minus: number,
    scale: number,
  ): void;
}

type TransformColumns = (
  first: number,
  second: number,
  third: number,
  columns: number,
  padHeight: number,
  twiddles: number,
  positions: number,
  work: number,
  to: number,
  stripBytes: number,
  frameBytes: number,
) => void;

export type FrameWasm = WasmModule<FrameExports>;
