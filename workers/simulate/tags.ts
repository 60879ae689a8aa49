import type { TagBlock } from '../../shared/contracts/blocks';
import type { Receiver, TagScenario } from '../../shared/contracts/scenario';
import { FS_PER_S } from '../../shared/units/ticks';
import { createRandom, type Random } from '../../shared/util/random';
import { type ClickModel, createClickModel } from './clicks';
import { axisLaw, drawPair, type PairPosition } from './pair-source';
import { createLanding } from './receivers';
import { createTagOrder } from './tag-order';

/**
 * Tags of a scenario in time order, block by block, in bounded memory. Pairs are born as a Poisson process (continuous
 * pump, many temporal modes); each photon lands by the double-Gaussian law, is seen with the arm's efficiency, and the
 * pixel's dead time, crosstalk, afterpulses, skew, jitter and cable delay follow. All processes run as one Poisson
 * process whose events are then told apart, so events come in order without a sort.
 */
export function* simulateTags(scenario: TagScenario, blockTags = 1 << 17): Generator<TagBlock> {
  const { tickFs } = scenario;
  const random = createRandom(scenario.seed);
  const order = createTagOrder();
  const emit = order.push;
  const signal = createClickModel(scenario.signal, tickFs, random, emit);
  const idler = createClickModel(scenario.idler, tickFs, random, emit);
  const reach: [number, number] = [
    Math.min(signal.reachTick[0], idler.reachTick[0]),
    Math.max(signal.reachTick[1], idler.reachTick[1], 0),
  ];
  const runTick = BigInt(Math.round((scenario.seconds * FS_PER_S) / tickFs));
  const processes = processesOf(scenario, signal, idler, random);
  const meanGap = FS_PER_S / (processes.perSecond * tickFs);

  let base = 0n;
  // Begins early enough for late cables, ends late enough for early ones.
  let now = -reach[1];
  let record = 0;
  const takeBlock = (limit: number): TagBlock | null => {
    const taken = order.takeBefore(limit);
    const block = toBlock(taken, base, runTick, record);
    record += block.count;
    return block.count > 0 ? block : null;
  };

  while (processes.perSecond > 0) {
    now += meanGap * random.exponential();
    signal.settle(now);
    idler.settle(now);
    const left = Number(runTick - base);
    if (now > left - reach[0]) break;
    processes.happen(now, (Number(base) + now) / Number(runTick));
    if (order.count >= blockTags) {
      const block = takeBlock(now + reach[0]);
      if (block !== null) yield block;
      const shift = Math.floor(now);
      base += BigInt(shift);
      now -= shift;
      order.rebase(shift);
      signal.rebase(shift);
      idler.rebase(shift);
    }
  }
  const last = takeBlock(Number.POSITIVE_INFINITY);
  if (last !== null) yield last;
}

/** Whole ticks inside the run, [0, runTick). */
function toBlock(
  taken: { tick: Float64Array; channel: Uint16Array },
  baseTick: bigint,
  runTick: bigint,
  firstRecord: number,
): TagBlock {
  const low = Number(-baseTick);
  const high = Number(runTick - baseTick);
  let start = 0;
  while (start < taken.tick.length && taken.tick[start]! < low) start += 1;
  let end = taken.tick.length;
  while (end > start && taken.tick[end - 1]! >= high) end -= 1;
  const count = end - start;
  const deltaTick = taken.tick.subarray(start, end);
  for (let i = 0; i < count; i++) deltaTick[i] = Math.floor(deltaTick[i]!);
  return {
    kind: 'tags',
    firstRecord,
    records: count,
    baseTick,
    deltaTick,
    channel: taken.channel.subarray(start, end),
    count,
    bytes: count * 10,
  };
}

interface Processes {
  /** Total rate of candidate events. */
  perSecond: number;
  /** One of them happens; `fraction` of the run has passed. */
  happen(tick: number, fraction: number): void;
}

function processesOf(
  scenario: TagScenario,
  signal: ClickModel,
  idler: ClickModel,
  random: Random,
): Processes {
  const law = axisLaw(scenario.source, scenario.optics);
  const landSignal = createLanding(scenario.signal);
  const landIdler = createLanding(scenario.idler);
  const etaS = scenario.signal.efficiency;
  const etaI = scenario.idler.efficiency;
  const position: PairPosition = [0, 0, 0, 0];
  const { drift } = scenario;
  const driftPeak = 1 + Math.abs(drift) / 2;
  const someSeen = 1 - (1 - etaS) * (1 - etaI);

  const pair = (tick: number, fraction: number): void => {
    if (drift !== 0 && random.uniform() * driftPeak > 1 + drift * (fraction - 0.5)) return;
    // Pairs with neither photon seen were never drawn; among the rest: signal alone, idler alone, both.
    const share = random.uniform() * someSeen;
    const seesSignal = share < etaS;
    const seesIdler = share < etaS * etaI || share >= etaS;
    drawPair(law, random, position);
    if (seesSignal) fireAt(signal, landSignal(position[0], position[1]), tick);
    if (seesIdler) fireAt(idler, landIdler(position[2], position[3]), tick);
  };

  const events: { perSecond: number; happen(tick: number, fraction: number): void }[] = [
    { perSecond: scenario.pairsPerSecond * someSeen * driftPeak, happen: pair },
  ];
  for (const [model, receiver] of [[signal, scenario.signal] as const, [idler, scenario.idler] as const]) {
    events.push({
      perSecond: noisePerSecond(receiver),
      happen: (tick) => model.fire(random.below(model.pixels), tick),
    });
    for (const hot of receiver.kind === 'array' ? receiver.hotPixels : []) {
      events.push({ perSecond: hot.perSecond, happen: (tick) => model.fire(hot.pixel, tick) });
    }
  }
  const perSecond = events.reduce((sum, event) => sum + event.perSecond, 0);
  return {
    perSecond,
    happen(tick, fraction) {
      let place = random.uniform() * perSecond;
      for (const event of events) {
        place -= event.perSecond;
        if (place < 0) return event.happen(tick, fraction);
      }
    },
  };
}

function fireAt(model: ClickModel, pixel: number, tick: number): void {
  if (pixel >= 0) model.fire(pixel, tick);
}

/** Dark counts and stray photons of a whole receiver, hot pixels apart. */
export function noisePerSecond(receiver: Receiver): number {
  const pixels = receiver.kind === 'array' ? receiver.width * receiver.height : 1;
  return receiver.darksPerSecond * pixels + receiver.backgroundPerSecond;
}
