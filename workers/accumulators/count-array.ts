/** Counters whose memory may move (a compiled module's grows): `values` is to be asked for anew at every use. */
export interface CountArray {
  readonly values: Float64Array;
}

/** Makes room for so many counters, all zero. */
export type PlaceCounts = (length: number) => CountArray;

export const placeInHeap: PlaceCounts = (length) => ({ values: new Float64Array(length) });
