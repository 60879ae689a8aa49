import type { TagBlock } from '../../../../shared/contracts/blocks';
import type { ArmSpec, ArmTally, PairTally, TagSpec, TagTally } from '../../../../shared/contracts/tally';

/** The slow twin of the tag accumulator: every definition of the tally written out as double loops over bigints. */
export interface RawTag {
  tick: bigint;
  channel: number;
}

interface KeptTag {
  tick: bigint;
  x: number;
  y: number;
}

export function armSpec(
  width: number,
  height: number,
  firstChannel: number,
  options: { masked?: number[]; delays?: number[] } = {},
): ArmSpec {
  const pixelOfChannel = new Int32Array(65536).fill(-1);
  const delayTickOfChannel = new Int32Array(65536);
  const masked = new Uint8Array(width * height);
  for (const pixel of options.masked ?? []) masked[pixel] = 1;
  for (let pixel = 0; pixel < width * height; pixel++) {
    if (masked[pixel] === 0) pixelOfChannel[firstChannel + pixel] = pixel;
    delayTickOfChannel[firstChannel + pixel] = options.delays?.[pixel] ?? 0;
  }
  return { width, height, pixelOfChannel, delayTickOfChannel, masked };
}

export function tagBlock(tags: RawTag[], baseTick: bigint, firstRecord = 0): TagBlock {
  return {
    kind: 'tags',
    firstRecord,
    records: tags.length,
    baseTick,
    deltaTick: Float64Array.from(tags, (tag) => Number(tag.tick - baseTick)),
    channel: Uint16Array.from(tags, (tag) => tag.channel),
    count: tags.length,
    bytes: tags.length * 8,
  };
}

export function slowTagTally(spec: TagSpec, raw: RawTag[]): TagTally {
  const a = keptTags(spec.a, raw);
  const b = keptTags(spec.b, raw);
  const ticks = [...a, ...b].map((tag) => tag.tick).sort((p, q) => (p < q ? -1 : 1));
  const firstTick = ticks[0] ?? null;
  const lastTick = ticks[ticks.length - 1] ?? null;
  let sliceTick = 1n;
  while (Number(sliceTick) * spec.tickFs < 1e10) sliceTick *= 2n;
  const sliceOf = (tick: bigint) => {
    const index = tick / sliceTick;
    return tick < 0n && index * sliceTick !== tick ? index - 1n : index;
  };
  let slices = 0;
  let firstSlice = 0n;
  if (firstTick !== null && lastTick !== null) {
    while (sliceOf(lastTick) - sliceOf(firstTick) + 1n > 128n) sliceTick *= 2n;
    firstSlice = sliceOf(firstTick);
    slices = Number(sliceOf(lastTick) - firstSlice) + 1;
  }
  const slice = (tag: KeptTag) => Number(sliceOf(tag.tick) - firstSlice);
  const counts = new Float64Array(spec.histogram.bins);
  const window = spec.window ?? { loTick: 0, hiTick: -1, shiftsTick: [] };
  const prompt = emptyPairs(spec, slices);
  const shifted = emptyPairs(spec, slices);
  for (const tagA of a) {
    for (const tagB of b) {
      const tau = Number(tagB.tick - tagA.tick);
      const bin = Math.floor((tau - spec.histogram.loTick) / spec.histogram.binTick);
      if (bin >= 0 && bin < counts.length) counts[bin]! += 1;
      if (spec.window === null) continue;
      if (tau >= window.loTick && tau <= window.hiTick) addPair(spec, prompt, slice(tagA), tagA, tagB);
      for (const shift of window.shiftsTick) {
        if (tau >= window.loTick + shift && tau <= window.hiTick + shift) {
          addPair(spec, shifted, slice(tagA), tagA, tagB);
        }
      }
    }
  }
  return {
    kind: 'tags',
    tickFs: spec.tickFs,
    records: raw.length,
    tags: ticks.length,
    unmapped: raw.length - ticks.length,
    firstTick,
    lastTick,
    outOfOrder: 0,
    sliceTick: Number(sliceTick),
    firstSlice: Number(firstSlice),
    slices,
    a: armTally(spec.a, a, slices, slice),
    b: armTally(spec.b, b, slices, slice),
    histogram: { loTick: spec.histogram.loTick, binTick: spec.histogram.binTick, counts },
    window,
    prompt,
    shifted,
  };
}

function keptTags(arm: ArmSpec, raw: RawTag[]): KeptTag[] {
  return raw.flatMap(({ tick, channel }) => {
    const pixel = arm.pixelOfChannel[channel]!;
    if (pixel < 0) return [];
    const delay = BigInt(arm.delayTickOfChannel[channel]!);
    return [{ tick: tick + delay, x: pixel % arm.width, y: Math.floor(pixel / arm.width) }];
  });
}

function armTally(arm: ArmSpec, tags: KeptTag[], slices: number, slice: (tag: KeptTag) => number): ArmTally {
  const singles = new Float64Array(arm.width * arm.height);
  const singlesPerSlice = new Float64Array(slices);
  for (const tag of tags) {
    singles[tag.y * arm.width + tag.x]! += 1;
    singlesPerSlice[slice(tag)]! += 1;
  }
  return { width: arm.width, height: arm.height, singles, singlesPerSlice, masked: arm.masked };
}

function emptyPairs(spec: TagSpec, slices: number): PairTally {
  const { a, b } = spec;
  const on = spec.window === null ? 0 : 1;
  const lags = on * (a.width + b.width - 1) * (a.height + b.height - 1);
  return {
    pairs: new Float64Array(slices),
    jointX: new Float64Array(on * slices * b.width * a.width),
    jointY: new Float64Array(on * slices * b.height * a.height),
    imageB: new Float64Array(on * slices * b.height * b.width),
    imageA: new Float64Array(on * slices * a.height * a.width),
    difference: new Float64Array(lags),
    sum: new Float64Array(lags),
    matrix: on === 0 ? null : new Float64Array(a.width * a.height * b.width * b.height),
  };
}

function addPair(spec: TagSpec, to: PairTally, slice: number, tagA: KeptTag, tagB: KeptTag): void {
  const { width: wA, height: hA } = spec.a;
  const { width: wB, height: hB } = spec.b;
  const wide = wA + wB - 1;
  to.pairs[slice]! += 1;
  to.jointX[(slice * wB + tagB.x) * wA + tagA.x]! += 1;
  to.jointY[(slice * hB + tagB.y) * hA + tagA.y]! += 1;
  to.imageB[(slice * hB + tagB.y) * wB + tagB.x]! += 1;
  to.imageA[(slice * hA + tagA.y) * wA + tagA.x]! += 1;
  to.difference[(tagB.y - tagA.y + hA - 1) * wide + tagB.x - tagA.x + wA - 1]! += 1;
  to.sum[(tagA.y + tagB.y) * wide + tagA.x + tagB.x]! += 1;
  to.matrix![(tagB.y * wB + tagB.x) * wA * hA + tagA.y * wA + tagA.x]! += 1;
}
