import type { Receiver } from '../../shared/contracts/scenario';
import type { Random } from '../../shared/util/random';
import { openCells, pixelSkewPs } from './receivers';

/** Largest |normal| that `createRandom` can give is below 8.6, so this bounds every jitter. */
export const JITTER_REACH = 9;

/** Takes a tag: channel and time in (fractional) ticks from the current base. */
export type Emit = (channel: number, tick: number) => void;

/** One arm's detector: dead time, crosstalk, afterpulses, skew and jitter. Events must come in time order. */
export interface ClickModel {
  /** A photon or a dark count wants to fire a local pixel. */
  fire(pixel: number, tick: number): void;
  /** Afterpulses due up to `tick`. */
  settle(tick: number): void;
  /** The base has moved `tick` forward. */
  rebase(tick: number): void;
  pixels: number;
  /** Earliest and latest a tag can stand from its avalanche, ticks. */
  reachTick: [number, number];
}

export function createClickModel(receiver: Receiver, tickFs: number, random: Random, emit: Emit): ClickModel {
  const isArray = receiver.kind === 'array';
  const pixels = isArray ? receiver.width * receiver.height : 1;
  const width = isArray ? receiver.width : 1;
  const firstChannel = isArray ? receiver.firstChannel : receiver.channel;
  const alive = isArray ? openCells(receiver) : new Uint8Array([1]);
  const perPs = 1000 / tickFs;
  const jitterTick = receiver.jitterPs * perPs;
  const deadTick = receiver.deadTimeNs * 1000 * perPs;
  const crosstalk = isArray ? receiver.crosstalk : 0;
  const { afterpulse } = receiver;
  const delayTick = pixelSkewPs(receiver).map((skewPs) => (receiver.delayPs + skewPs) * perPs);
  const lastFire = new Float64Array(pixels).fill(Number.NEGATIVE_INFINITY);
  /** Afterpulses to come, earliest last. */
  const pending: { pixel: number; tick: number }[] = [];

  const fire = (pixel: number, tick: number): void => {
    if (alive[pixel] === 0 || tick - lastFire[pixel]! <= deadTick) return;
    lastFire[pixel] = tick;
    const jitter = jitterTick === 0 ? 0 : jitterTick * random.normal();
    emit(firstChannel + pixel, tick + delayTick[pixel]! + jitter);
    if (crosstalk > 0 && random.uniform() < crosstalk) {
      const neighbour = neighbourOf(pixel, width, pixels, random.below(4));
      if (neighbour >= 0) fire(neighbour, tick);
    }
    if (afterpulse !== undefined && random.uniform() < afterpulse.probability) {
      const due = tick + deadTick + afterpulse.meanNs * 1000 * perPs * random.exponential();
      let at = pending.length;
      while (at > 0 && pending[at - 1]!.tick < due) at -= 1;
      pending.splice(at, 0, { pixel, tick: due });
    }
  };

  let earliest = Number.POSITIVE_INFINITY;
  let latest = Number.NEGATIVE_INFINITY;
  for (const delay of delayTick) {
    earliest = Math.min(earliest, delay - JITTER_REACH * jitterTick);
    latest = Math.max(latest, delay + JITTER_REACH * jitterTick);
  }
  return {
    fire,
    settle(tick) {
      for (let next = pending.at(-1); next !== undefined && next.tick <= tick; next = pending.at(-1)) {
        pending.pop();
        fire(next.pixel, next.tick);
      }
    },
    rebase(tick) {
      for (let i = 0; i < pixels; i++) lastFire[i]! -= tick;
      for (const due of pending) due.tick -= tick;
    },
    pixels,
    reachTick: [earliest, latest],
  };
}

/** Right, left, below, above; -1 past the edge. */
export function neighbourOf(pixel: number, width: number, pixels: number, side: number): number {
  const x = pixel % width;
  if (side === 0) return x + 1 < width ? pixel + 1 : -1;
  if (side === 1) return x > 0 ? pixel - 1 : -1;
  if (side === 2) return pixel + width < pixels ? pixel + width : -1;
  return pixel - width >= 0 ? pixel - width : -1;
}
