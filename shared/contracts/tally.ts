import type { Region } from './dial';

/**
 * What accumulators have counted so far: the only thing studies see of the data. All arrays are row-major.
 * Arm A and arm B are whatever the study pairs (signal and idler; bucket and array). tau = t_B - t_A.
 *
 * Slices. Time is cut into slices of `sliceTick` from tick 0 of the acquisition; the length doubles as the run grows, so
 * that at most 128 are in use (65 to 128 once the run is long enough). They are the bootstrap's blocks. A pair belongs to
 * the slice of its arm-A tag. This depends on times alone, so any chunking and any split gives the same slices.
 */
export interface TagTally {
  kind: 'tags';
  tickFs: number;
  /** Records read, tags kept, tags on channels that the detector map does not name or masks. */
  records: number;
  tags: number;
  unmapped: number;
  /** First and last kept tag, absolute ticks after delay correction; null when there is none. */
  firstTick: bigint | null;
  lastTick: bigint | null;
  /** Tags that came before an earlier one by more than the sorting horizon (0 in a healthy file). */
  outOfOrder: number;

  /** First slice in use is `firstSlice` (absolute index); `slices` of them are held. */
  sliceTick: number;
  firstSlice: number;
  slices: number;

  a: ArmTally;
  b: ArmTally;

  /** All-pairs delay histogram: bin m covers [loTick + m*binTick, loTick + (m+1)*binTick). */
  histogram: { loTick: number; binTick: number; counts: Float64Array };

  /** Prompt window and shifted windows, in whole ticks, both ends included, on tau. */
  window: { loTick: number; hiTick: number; shiftsTick: number[] };
  /** Pairs inside the prompt window. */
  prompt: PairTally;
  /** Pairs inside all shifted windows together; divide by `window.shiftsTick.length`. */
  shifted: PairTally;
}

export interface ArmTally {
  width: number;
  height: number;
  /** width*height tags per pixel (masked ones 0). */
  singles: Float64Array;
  /** slices tags per slice. */
  singlesPerSlice: Float64Array;
  /** 1 where masked. */
  masked: Uint8Array;
}

export interface PairTally {
  /** slices */
  pairs: Float64Array;
  /** slices * wB * wA : [slice][xB][xA] */
  jointX: Float64Array;
  /** slices * hB * hA : [slice][yB][yA] */
  jointY: Float64Array;
  /** slices * hB * wB: arm-B image of the paired tags, [slice][yB][xB] (the heralded ghost image). */
  imageB: Float64Array;
  /** slices * hA * wA: arm-A image of the paired tags. */
  imageA: Float64Array;
  /** (hA+hB-1) * (wA+wB-1): difference coordinate; x index = xB - xA + (wA-1), y likewise. Totals over slices. */
  difference: Float64Array;
  /** Same shape: sum coordinate; x index = xA + xB. */
  sum: Float64Array;
  /** nB * nA channel-by-channel coincidences [pixelB][pixelA], null when nA*nB > 2^22. */
  matrix: Float64Array | null;
}

/** Chosen by the study, fixed for a whole acquisition; every worker gets the same. */
export interface TagSpec {
  kind: 'tags';
  tickFs: number;
  a: ArmSpec;
  b: ArmSpec;
  histogram: { loTick: number; binTick: number; bins: number };
  /** null: histogram and singles only (the pass that looks for the delay). */
  window: { loTick: number; hiTick: number; shiftsTick: number[] } | null;
  /**
   * Keep every pair with tau in here, both ends included: windows and histograms inside it then need no bytes. A range
   * with more than `most` of them keeps none.
   */
  keepPairs?: { minTauTick: number; maxTauTick: number; most?: number };
}

export interface ArmSpec {
  width: number;
  height: number;
  /** Length 65536: pixel index y*width+x of each channel, -1 when not of this arm or masked. */
  pixelOfChannel: Int32Array;
  /** Length 65536: whole ticks added to each channel's times. */
  delayTickOfChannel: Int32Array;
  masked: Uint8Array;
}

/**
 * Frames. D_k = I_k - I_(k+1). Estimator (consecutive frames, symmetrised):
 * G_ij = 1/(F-1) * sum_(l=0)^(F-2) [ I_l(i) I_l(j) - (I_l(i) I_(l+1)(j) + I_(l+1)(i) I_l(j))/2 ].
 * Identity: sum_k D_k(i) D_k(j) / 2 = sum of the same, plus half of (last frame - first frame) outer products; the
 * tally is already corrected for those end frames in the totals, and per block uses sum D_k D_k / 2 alone.
 */
export interface FrameTally {
  kind: 'frames';
  width: number;
  height: number;
  frames: number;
  /** Differences D_k accumulated (frames - 1 for a gapless read). */
  differences: number;
  masked: Uint8Array;
  /** height*width sums over frames of I and of I^2. */
  sum: Float64Array;
  sumSquares: Float64Array;
  /** height*width: diagonal G_ii * (F-1), to take i = j out of the projections. */
  diagonal: Float64Array;
  /** Sum coordinate, (2H-1)*(2W-1), index s = i + j; times (F-1); i = j included, unmasked pixels only. */
  plus: Float64Array;
  /** Difference coordinate, (2H-1)*(2W-1), index d + (W-1); times (F-1). */
  minus: Float64Array;
  /** width*width [x2][x1]: G summed over y1, y2; times (F-1). */
  jointX: Float64Array;
  /** height*height [y2][y1]. */
  jointY: Float64Array;
  /** Frame totals per block, for drift: mean total of a frame in each block. */
  blockFrames: Float64Array;
  blockTotals: Float64Array;
  blockDifferences: Float64Array;
  /** Cut-out of both maps that is kept block by block: first column and row, size. It lies around their middle. */
  blockWindow: { x: number; y: number; nx: number; ny: number };
  /**
   * Per bootstrap block (blocks = blockFrames.length) the sums of D_k D_k / 2 inside the window, row-major, in single
   * precision: they serve the bootstrap alone. In `blockPlus` i = j is taken out, in `blockMinus` it sits on lag 0. Null
   * where the block has no difference. Not to be written to: the counts may go on using them.
   */
  blockPlus: readonly (Float32Array | null)[];
  blockMinus: readonly (Float32Array | null)[];
  /**
   * Full joint distribution of the pixels of `jointRegion`, n of them row-major: G_ij times (F-1) for i <= j, row by row,
   * n (n + 1) / 2 values, corrected for the end frames. Masked pixels hold 0. Both are there where they were asked for.
   */
  jointRegion?: Region;
  joint?: Float64Array;
}

export interface FrameSpec {
  kind: 'frames';
  width: number;
  height: number;
  /** Frames of the whole acquisition: block of frame l is floor(l * blocks / frames). */
  frames: number;
  blocks: number;
  masked: Uint8Array;
  /** Taken from every pixel; left out: 0. */
  offset?: number;
  /** Photon counting: 1 where the value less `offset` is above it, else 0. Null or left out: the value itself. */
  threshold?: number | null;
  /** Every frame is scaled to the mean total of all frames. */
  normalised?: boolean;
  /** Largest side of the maps that are kept block by block; left out: 511, the whole map of 256 pixels. */
  blockSide?: number;
  /** Pixels whose full joint distribution is summed, at most 4096; null or left out: none. */
  jointRegion?: Region | null;
}

export type Tally = TagTally | FrameTally;
export type TallySpec = TagSpec | FrameSpec;
