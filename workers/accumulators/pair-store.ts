import type { ArmSpec, PairTally } from '../../shared/contracts/tally';
import {
  countCells,
  countDifference,
  countMatrix,
  countSlots,
  countSum,
  type PairColumns,
} from '../kernels/pair-counts';
import { lagsOfMatrix, pairCells } from '../kernels/pair-recount';
import { type CountArray, type PlaceCounts, placeInHeap } from './count-array';
import { SliceRing } from './slice-grid';

/** Above this many channel pairs the full matrix is not kept. */
export const MATRIX_LIMIT = 2 ** 22;

/**
 * Everything that is counted about the pairs of one window (or of all shifted windows together).
 * With `enabled` false (no window) nothing but zeros per slice is kept and the other arrays are empty.
 * Memory: 128 slices of 8 * (wA*wB + hA*hB + nA + nB) bytes, and 8 * nA * nB for the matrix.
 */
export class PairStore {
  readonly #a: ArmSpec;
  readonly #b: ArmSpec;
  readonly #rings: Record<'pairs' | 'jointX' | 'jointY' | 'imageB' | 'imageA', SliceRing>;
  readonly #difference: CountArray;
  readonly #sum: CountArray;
  readonly #matrix: CountArray | null;

  /** Counters are placed in this order: pairs, joint X, joint Y, image B, image A, difference, sum, matrix. */
  constructor(a: ArmSpec, b: ArmSpec, enabled: boolean, place: PlaceCounts = placeInHeap) {
    this.#a = a;
    this.#b = b;
    const one = enabled ? 1 : 0;
    const pixelsA = a.width * a.height;
    const pixelsB = b.width * b.height;
    this.#rings = {
      pairs: new SliceRing(1, place),
      jointX: new SliceRing(one * a.width * b.width, place),
      jointY: new SliceRing(one * a.height * b.height, place),
      imageB: new SliceRing(one * pixelsB, place),
      imageA: new SliceRing(one * pixelsA, place),
    };
    const lags = one * (a.width + b.width - 1) * (a.height + b.height - 1);
    this.#difference = place(lags);
    this.#sum = place(lags);
    this.#matrix = enabled && pixelsA * pixelsB <= MATRIX_LIMIT ? place(pixelsA * pixelsB) : null;
  }

  add(pairs: PairColumns, count: number): void {
    if (count === 0) return;
    const { slot, xA, yA, xB, yB } = pairs;
    const { width: widthA, height: heightA } = this.#a;
    const { width: widthB } = this.#b;
    const { pairs: perSlice, jointX, jointY, imageB, imageA } = this.#rings;
    countSlots(slot, count, perSlice.counts);
    countCells(slot, xB, xA, count, widthA, jointX.cells, jointX.counts);
    countCells(slot, yB, yA, count, heightA, jointY.cells, jointY.counts);
    countCells(slot, yB, xB, count, widthB, imageB.cells, imageB.counts);
    countCells(slot, yA, xA, count, widthA, imageA.cells, imageA.counts);
    countDifference(pairs, count, widthA, heightA, widthB, this.#difference.values);
    countSum(pairs, count, widthA, widthB, this.#sum.values);
    if (this.#matrix !== null) countMatrix(pairs, count, widthA * heightA, this.#matrix.values);
  }

  fold(doublings: number, first: number, count: number): void {
    for (const ring of Object.values(this.#rings)) ring.fold(doublings, first, count);
  }

  /** Adds what slices [first, first + count), shorter by `doublings` doublings, have counted. */
  addTally(tally: PairTally, doublings: number, first: number, count: number): void {
    for (const name of ringNames) this.#rings[name].addDense(tally[name], first, count, doublings);
    addInto(this.#difference.values, tally.difference);
    addInto(this.#sum.values, tally.sum);
    if (this.#matrix !== null && tally.matrix !== null) addInto(this.#matrix.values, tally.matrix);
  }

  /** Difference and sum coordinate anew from the matrix, where one is kept: for counts that left them out. */
  settleLags(): void {
    if (this.#matrix === null) return;
    const whole = (arm: ArmSpec) => ({ ...arm, removed: new Uint8Array(arm.width * arm.height) });
    lagsOfMatrix(this.#matrix.values, pairCells(whole(this.#a), whole(this.#b)), {
      difference: this.#difference.values,
      sum: this.#sum.values,
    });
  }

  tally(first: number, count: number): PairTally {
    const { pairs, jointX, jointY, imageB, imageA } = this.#rings;
    return {
      pairs: pairs.toDense(first, count),
      jointX: jointX.toDense(first, count),
      jointY: jointY.toDense(first, count),
      imageB: imageB.toDense(first, count),
      imageA: imageA.toDense(first, count),
      difference: this.#difference.values.slice(),
      sum: this.#sum.values.slice(),
      matrix: this.#matrix?.values.slice() ?? null,
    };
  }
}

const ringNames = ['pairs', 'jointX', 'jointY', 'imageB', 'imageA'] as const;

/** to[i] += from[i] over the length of `to`. */
export function addInto(to: Float64Array, from: Float64Array): void {
  for (let i = 0; i < to.length; i++) to[i]! += from[i]!;
}
