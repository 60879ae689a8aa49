/** Time as whole ticks. See the precision policy in `shared/contracts/blocks`. */

export const FS_PER_PS = 1000;
export const FS_PER_S = 1e15;

/** Seconds of a span of ticks. Exact to double rounding for any span: the 64-bit difference is split before dividing. */
export function tickSpanToSeconds(spanTick: bigint, tickFs: number): number {
  // Whole 2^40-tick pieces and a remainder are both exact in doubles up to 2^93 ticks.
  const piece = 1n << 40n;
  const high = Number(spanTick / piece);
  const low = Number(spanTick % piece);
  return (high * (Number(piece) * tickFs) + low * tickFs) / FS_PER_S;
}

export function psToTicks(ps: number, tickFs: number): number {
  return (ps * FS_PER_PS) / tickFs;
}

export function ticksToPs(ticks: number, tickFs: number): number {
  return (ticks * tickFs) / FS_PER_PS;
}

/**
 * What to add to differences from `fromBase` so that they are differences from `toBase`. Exact when the two bases lie
 * within 2^53 ticks; beyond that the caller's event is older than any window and must be dropped, so this answers NaN.
 */
export function rebaseTick(fromBase: bigint, toBase: bigint): number {
  const shift = fromBase - toBase;
  const limit = 1n << 53n;
  return shift > limit || shift < -limit ? Number.NaN : Number(shift);
}
