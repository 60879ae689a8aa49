import { planScale } from './text/decimal';

/**
 * Ticks of a companion clock as whole ticks of the main one: t (1 + drift) + offset, rounded halves up. What a tag
 * becomes depends on its tick alone, never on the block it came in: times are cut into cells of 2^40 ticks, whose start
 * is mapped in long integers and whose inside in doubles, exact to a thousandth of a tick.
 */
export interface ClockMap {
  /** The tick `cell` begins with, and the fraction of a tick behind it. */
  startOf(cell: bigint): { tick: bigint; fraction: number };
  /** Main ticks to one companion tick. */
  scale: number;
}

export const cellBits = 40n;
export const cellTicks = 2 ** 40;

export function createClockMap(
  companionTickFs: number,
  mainTickFs: number,
  { offsetPs, drift }: { offsetPs: number; drift: number },
): ClockMap {
  const { numerator, denominator } = planScale(companionTickFs, mainTickFs);
  const ratio = companionTickFs / mainTickFs;
  const offsetTick = (offsetPs * 1000) / mainTickFs;
  // Whole ticks go their own way: beside a long offset a double has no room for what the drift adds.
  const wholeOffset = Math.floor(offsetTick);
  const offsetRest = offsetTick - wholeOffset;
  return {
    scale: ratio * (1 + drift),
    startOf(cell) {
      const start = cell << cellBits;
      const whole = start * numerator;
      let tick = whole / denominator;
      let rest = whole % denominator;
      if (rest < 0n) {
        tick -= 1n;
        rest += denominator;
      }
      const moved = Number(start) * ratio * drift + offsetRest;
      const floor = Math.floor(moved);
      return {
        tick: tick + BigInt(wholeOffset) + BigInt(floor),
        fraction: moved - floor + Number(rest) / Number(denominator),
      };
    },
  };
}

/** Writes the mapped ticks of `count` tags as differences from `zeroTick`. */
export function mapTicks(
  map: ClockMap,
  baseTick: bigint,
  deltaTick: Float64Array,
  count: number,
  zeroTick: bigint,
  into: Float64Array,
): void {
  const firstCell = baseTick >> cellBits;
  const inCell = Number(baseTick - (firstCell << cellBits));
  let known = Number.NaN;
  let start = 0;
  let fraction = 0;
  for (let i = 0; i < count; i += 1) {
    const ticks = inCell + deltaTick[i]!;
    const cell = Math.floor(ticks / cellTicks);
    if (cell !== known) {
      known = cell;
      const mapped = map.startOf(firstCell + BigInt(cell));
      start = Number(mapped.tick - zeroTick);
      fraction = mapped.fraction;
    }
    into[i] = start + Math.floor(fraction + (ticks - cell * cellTicks) * map.scale + 0.5);
  }
}

export function mapTick(map: ClockMap, tick: bigint): bigint {
  const cell = tick >> cellBits;
  const { tick: start, fraction } = map.startOf(cell);
  return start + BigInt(Math.floor(fraction + Number(tick - (cell << cellBits)) * map.scale + 0.5));
}
