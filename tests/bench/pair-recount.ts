/**
 * Counting kept pairs again against reading the records again: `npx tsx tests/bench/pair-recount.ts`. Two arrays of
 * 16 x 16 pixels, one coincidence in two kept pairs; one thread each way, CPU and wall time, medians.
 */
import { rm } from 'node:fs/promises';
import type { TagBlock } from '../../shared/contracts/blocks';
import type { TagSpec } from '../../shared/contracts/tally';
import { createRandom } from '../../shared/util/random';
import { createPairCache, recountPairs } from '../../workers/accumulators/pair-cache';
import { createTagAccumulator } from '../../workers/accumulators/tag-accumulator';
import { buildArm, buildTagSpec } from '../../workers/studies/tag-spec';

void rm;
const WIDTH = Number(process.argv[2] ?? 16);
const map = (firstChannel: number) => ({
  width: WIDTH,
  height: WIDTH,
  firstChannel,
  order: 'rows' as const,
  flipX: false,
  flipY: false,
  pitchUm: 50,
  maskedPixels: [] as number[],
  delayPs: 0,
  pixelDelayPs: [],
});
const specWith = (over: object): TagSpec =>
  buildTagSpec({
    a: buildArm(map(0), 1000),
    b: buildArm(map(WIDTH * WIDTH), 1000),
    tickFs: 1000,
    delayPs: 0,
    windowPs: 1200,
    shiftStepPs: 20000,
    shiftCount: 10,
    histogramRangePs: 200000,
    histogramBinPs: 100,
    ...over,
  });
const random = createRandom(1);
const N = 1 << 20;
function block(k: number): TagBlock {
  const deltaTick = new Float64Array(N);
  const channel = new Uint16Array(N);
  let t = 0;
  for (let i = 0; i < N; i += 2) {
    t += Math.floor(random.exponential() * Number(process.argv[3] ?? 500_000));
    deltaTick[i] = t;
    const p = random.below(WIDTH * WIDTH);
    channel[i] = p;
    deltaTick[i + 1] = t + Math.abs(Math.round(300 * random.normal()));
    channel[i + 1] = WIDTH * WIDTH + ((p + random.below(3)) % (WIDTH * WIDTH));
  }
  return {
    kind: 'tags',
    firstRecord: k * N,
    records: N,
    baseTick: BigInt(k) * 2n ** 42n,
    deltaTick,
    channel,
    count: N,
    bytes: 8 * N,
  };
}
const blocks = Array.from({ length: Number(process.argv[4] ?? 6) }, (_, k) => block(k));
function time<T>(label: string, work: () => T): T {
  const c = process.cpuUsage();
  const from = performance.now();
  const value = work();
  const { user, system } = process.cpuUsage(c);
  console.log(
    label.padEnd(30),
    (performance.now() - from).toFixed(1),
    'ms wall',
    ((user + system) / 1000).toFixed(1),
    'ms cpu',
  );
  return value;
}
const plain = specWith({});
const keep: TagSpec = { ...plain, keepPairs: { minTauTick: -250_000, maxTauTick: 250_000 } };
function countAll(spec: TagSpec) {
  const whole = createTagAccumulator(spec);
  for (const b of blocks) {
    const one = createTagAccumulator(spec);
    for (let i = 0; i < N; i += 65536) {
      one.push({
        ...b,
        records: 65536,
        count: 65536,
        deltaTick: b.deltaTick.subarray(i, i + 65536),
        channel: b.channel.subarray(i, i + 65536),
      });
    }
    whole.merge(one);
  }
  return whole;
}
for (let r = 0; r < 2; r++) {
  time('count', () => countAll(plain));
  time('count and keep', () => countAll(keep));
}
const w = countAll(keep);
const cache = createPairCache(keep, w.tally(), w.kept()!)!;
console.log('pairs', cache.pairs, 'bytes/pair', cache.bytes / cache.pairs);
for (let r = 0; r < 8; r++) {
  const asked = specWith({ windowPs: 1000 + 50 * r, delayPs: 10 * r });
  const t = time('recount', () => recountPairs(cache, asked))!;
  console.log(
    t.prompt.pairs.reduce((a, b) => a + b),
    t.shifted.pairs.reduce((a, b) => a + b),
  );
}
