import type { WasmModule } from './wasm-module';

/** Decodes records into columns of as much room; answers the tags written. */
export type DecodeRecords = (
  rulesAt: number,
  sourceAt: number,
  records: number,
  timeAt: number,
  channelAt: number,
) => number;

/** What `wasm/tags.ts` exports; addresses (`...At`) and counts are numbers. Each is described there. */
export interface TagExports {
  decodeAny(
    rulesAt: number,
    sourceAt: number,
    records: number,
    timeAt: number,
    channelAt: number,
    recordBytes: number,
    isBig: number,
  ): number;
  decodeEight: DecodeRecords;
  decodeEightHigh: DecodeRecords;
  decodeEightBig: DecodeRecords;
  decodeFour: DecodeRecords;
  decodeFourBig: DecodeRecords;
  takeTags(
    deltaAt: number,
    channelAt: number,
    count: number,
    tableAt: number,
    timeAt: number,
    siteAt: number,
  ): number;
  orderOf(timeAt: number, count: number, latest: number, horizon: number, outAt: number): void;
  isSorted(timeAt: number, count: number): number;
  sortTags(timeAt: number, siteAt: number, count: number, scratchTimeAt: number, scratchSiteAt: number): void;
  countBelow(siteAt: number, count: number, sitesA: number): number;
  dropDead(timeAt: number, siteAt: number, count: number, deadTick: number, lastOfSiteAt: number): number;
  scanTags(
    planAt: number,
    timeAt: number,
    siteAt: number,
    start: number,
    startStop: number,
    stop: number,
  ): void;
  scanPairs(planAt: number, timeAt: number, siteAt: number, start: number, stop: number): number;
  scanBetween(
    planAt: number,
    leftTimeAt: number,
    leftSiteAt: number,
    leftStop: number,
    timeAt: number,
    siteAt: number,
    stop: number,
  ): number;
  countPairs(planAt: number): void;
  countSites(siteAt: number, count: number, countsAt: number): void;
  countBuckets(
    riseAt: number,
    count: number,
    from: number,
    span: number,
    bits: number,
    countsAt: number,
  ): void;
  toBuckets(
    riseAt: number,
    pixelAt: number,
    count: number,
    from: number,
    span: number,
    bits: number,
    slot: number,
    nextAt: number,
    intoAt: number,
  ): void;
  toColumns(
    fromAt: number,
    count: number,
    offsetAt: number,
    pixelAAt: number,
    pixelBAt: number,
    slotAt: number,
  ): void;
  matrixMerged(
    timeAt: number,
    siteAt: number,
    start: number,
    startStop: number,
    stop: number,
    sitesA: number,
    loTick: number,
    hiTick: number,
    outAt: number,
    listAt: number,
  ): void;
  histogramLists(
    xAt: number,
    countX: number,
    yAt: number,
    countY: number,
    low: number,
    loTick: number,
    binTick: number,
    bins: number,
    outAt: number,
    listAt: number,
  ): number;
  matrixLists(
    xAt: number,
    siteXAt: number,
    countX: number,
    yAt: number,
    siteYAt: number,
    countY: number,
    low: number,
    loTick: number,
    hiTick: number,
    sitesX: number,
    outAt: number,
    listAt: number,
  ): number;
  imageLists(
    xAt: number,
    siteXAt: number,
    countX: number,
    yAt: number,
    countY: number,
    low: number,
    loTick: number,
    hiTick: number,
    outAt: number,
    listAt: number,
  ): number;
  countTriples(
    heraldAt: number,
    heralds: number,
    oneAt: number,
    twoAt: number,
    lo1: number,
    hi1: number,
    lo2: number,
    hi2: number,
    outAt: number,
  ): void;
}

export type TagWasm = WasmModule<TagExports>;
