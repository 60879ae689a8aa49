import type { TagBlock } from '../../shared/contracts/blocks';
import { createRandom, type Random } from '../../shared/util/random';

/** More channels than any test uses; keeps tick * CHANNELS below 2^53 for a run of seconds. */
const CHANNELS = 1024;

/** A plain Poisson stream of pairs with everything known, written apart from the simulator so that both can be wrong alone. */
export interface PairStream {
  seconds: number;
  tickFs: number;
  pairRate: number;
  /** Gaussian sigma of each arm's timing. */
  jitterPs: [number, number];
  /** Delay of arm B against arm A. */
  delayPs: number;
  /** Unpaired tags per second of each arm. */
  darks: [number, number];
  /** Channel at which each photon of a pair is seen, -1 when it is not. */
  land(random: Random): [number, number];
  /** Channel of an unpaired tag. */
  darkChannel(arm: 0 | 1, random: Random): number;
  /** Multiplies all rates; at most 1. */
  brightness?(fraction: number): number;
}

export function pairStream(stream: PairStream, seed: number): TagBlock {
  const random = createRandom(seed);
  const psPerTick = stream.tickFs / 1000;
  const lengthPs = stream.seconds * 1e12;
  const bright = stream.brightness ?? (() => 1);
  // Tick and channel in one double, so that the plain numeric sort orders them.
  const keys: number[] = [];
  const put = (timePs: number, channel: number): void => {
    const tick = Math.floor(timePs / psPerTick);
    if (channel < 0 || tick < 0 || timePs >= lengthPs) return;
    keys.push(tick * CHANNELS + channel);
  };
  const events = (rate: number, happen: (timePs: number) => void): void => {
    if (!(rate > 0)) return;
    for (let t = 0; ; ) {
      t += (random.exponential() / rate) * 1e12;
      if (t >= lengthPs) return;
      if (random.uniform() < bright(t / lengthPs)) happen(t);
    }
  };
  events(stream.pairRate, (t) => {
    const [a, b] = stream.land(random);
    if (a >= 0) put(t + stream.jitterPs[0] * random.normal(), a);
    if (b >= 0) put(t + stream.delayPs + stream.jitterPs[1] * random.normal(), b);
  });
  for (const arm of [0, 1] as const) {
    events(stream.darks[arm], (t) => put(t, stream.darkChannel(arm, random)));
  }
  const sorted = Float64Array.from(keys).sort();
  return {
    kind: 'tags',
    firstRecord: 0,
    records: keys.length,
    baseTick: 0n,
    deltaTick: sorted.map((key) => Math.floor(key / CHANNELS)),
    channel: Uint16Array.from(sorted, (key) => key % CHANNELS),
    count: keys.length,
    bytes: keys.length * 8,
  };
}
