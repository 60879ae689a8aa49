import { rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Block } from '../../shared/contracts/blocks';
import type { Layout } from '../../shared/contracts/layout';
import type { ByteSource, Reader } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';
import { createRandom, type Random } from '../../shared/util/random';
import { inspectSource, openReader } from '../../workers/formats/registry';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { openPathSource } from '../../workers/pipeline/node-source';
import { openBlobSource } from '../../workers/pipeline/sources';

/** A good file and the layout that reads it. */
export interface FuzzSeed {
  name: string;
  bytes: Uint8Array;
  layout: Layout;
}

export interface FuzzReport {
  cases: number;
  /** Damaged files that were read to their end all the same. */
  read: number;
  /** How often each problem was thrown by opening or reading. */
  problems: Record<string, number>;
  /** Of the processor, by the slowest case. */
  slowestSeconds: number;
  /** Array memory that the largest case left behind before anything was collected. */
  largestBytes: number;
}

/** Bounds of one case: inspections, an opening and two readings. */
const mostSeconds = 2;
const mostBytes = 2 ** 29;
const never = { cancelled: false };
/** Every which case is inspected without a layout too: what is recognised by nothing is searched for records, slowly. */
const looks = 5;

/**
 * Damages good files and reads them: whatever the bytes, a reader gives blocks that hold what they say or throws a
 * `Problem` with a place, in bounded time and memory. A failing case is named by its number, which the seed repeats.
 */
export async function fuzzReader(
  seeds: readonly FuzzSeed[],
  { cases, seed, only }: { cases: number; seed: number; only?: number },
): Promise<FuzzReport> {
  const report: FuzzReport = { cases, read: 0, problems: {}, slowestSeconds: 0, largestBytes: 0 };
  for (let k = 0; k < cases; k += 1) {
    if (only !== undefined && k !== only) continue;
    const random = createRandom(seed * 1_000_003 + k);
    const chosen = seeds[k % seeds.length]!;
    const bytes = damage(chosen.bytes, random);
    const cpu = process.cpuUsage();
    const { arrayBuffers } = process.memoryUsage();
    try {
      const problem = await readDamaged(chosen, bytes, k % looks === 0);
      if (problem === null) report.read += 1;
      else report.problems[problem] = (report.problems[problem] ?? 0) + 1;
    } catch (thrown) {
      throw new Error(
        `Case ${k} of seed ${seed} (${chosen.name}, ${bytes.length} bytes): ${String(thrown)}`,
        {
          cause: thrown,
        },
      );
    }
    const { user, system } = process.cpuUsage(cpu);
    const seconds = (user + system) / 1e6;
    const left = process.memoryUsage().arrayBuffers - arrayBuffers;
    report.slowestSeconds = Math.max(report.slowestSeconds, seconds);
    report.largestBytes = Math.max(report.largestBytes, left);
    if (seconds > mostSeconds || left > mostBytes) {
      throw new Error(`Case ${k} of seed ${seed} (${chosen.name}) took ${seconds} s and left ${left} bytes.`);
    }
  }
  return report;
}

/** The code of the problem that opening or reading ended in, or null. */
async function readDamaged(seed: FuzzSeed, bytes: Uint8Array, isUnknown: boolean): Promise<string | null> {
  const open = await opener(seed.layout, bytes);
  try {
    if (isUnknown) await problemIn(async () => inspected(await open(), null));
    await problemIn(async () => inspected(await open(), seed.layout));
    return await problemIn(async () => readTwice(await open(), seed.layout));
  } finally {
    await rm(damagedPath, { force: true });
  }
}

const damagedPath = join(tmpdir(), `damaged-${process.pid}`);

/** The library of HDF5 reads files only, in Node; all else is read from memory. */
async function opener(layout: Layout, bytes: Uint8Array): Promise<() => Promise<ByteSource>> {
  const named = { name: 'damaged', size: bytes.length };
  if (layout.format !== 'hdf5') {
    const file = new Blob([Uint8Array.from(bytes)]);
    return async () => openBlobSource({ ...named, file });
  }
  await writeFile(damagedPath, bytes);
  return () => openPathSource({ ...named, path: damagedPath });
}

async function inspected(source: ByteSource, layout: Layout | null): Promise<void> {
  try {
    await inspectSource(source, layout, nodeEnvironment);
  } finally {
    await source.close();
  }
}

async function problemIn(work: () => Promise<unknown>): Promise<string | null> {
  try {
    await work();
    return null;
  } catch (thrown) {
    if (!(thrown instanceof Problem)) throw thrown;
    const isTold = thrown.place !== null && thrown.message.length > 20 && thrown.code !== 'internal';
    if (!isTold) throw new Error(`A problem without place or sentence: ${thrown.code}, ${thrown.message}`);
    return thrown.code;
  }
}

/** The end first, so that the second reading goes back. */
async function readTwice(source: ByteSource, layout: Layout): Promise<void> {
  const reader = await openReader(source, layout, nodeEnvironment).catch(async (thrown: unknown) => {
    await source.close();
    throw thrown;
  });
  try {
    const { facts } = reader;
    const total = facts.kind === 'tags' ? facts.records : facts.frames;
    const middle = Math.floor(total / 2);
    await readRange(reader, middle, total);
    await readRange(reader, 0, middle);
  } finally {
    await reader.close();
  }
}

async function readRange(reader: Reader, start: number, end: number): Promise<void> {
  const offset = await reader.tickOffsetAt(start, never);
  let next = start;
  for await (const block of reader.read({ start, end }, offset, never)) {
    next += assertBlock(block, next);
  }
  if (next !== end) throw new Error(`blocks end at ${next} instead of ${end}`);
}

function assertBlock(block: Block, next: number): number {
  if (block.kind === 'frames') {
    const { firstFrame, count, width, height, pixels } = block;
    if (firstFrame !== next || pixels.length !== count * width * height)
      throw new Error('frames that do not fit');
    return count;
  }
  const { firstRecord, records, deltaTick, channel, count } = block;
  const isWhole = deltaTick.length >= count && channel.length >= count && count <= records;
  if (firstRecord !== next || !isWhole) throw new Error('tags that do not fit');
  for (let i = 0; i < count; i += 1) {
    if (!Number.isSafeInteger(deltaTick[i]!)) throw new Error(`a difference of ${deltaTick[i]} ticks`);
  }
  return records;
}

const hugeWords: bigint[] = [
  0n,
  1n,
  2n ** 31n,
  2n ** 32n - 1n,
  10n ** 12n,
  2n ** 53n,
  2n ** 63n,
  2n ** 64n - 1n,
];

/** One to three injuries, mostly where a file keeps what it says about itself: at its start and its end. */
function damage(good: Uint8Array, random: Random): Uint8Array {
  let bytes: Uint8Array = good.slice();
  for (let injuries = 1 + random.below(3); injuries > 0 && bytes.length > 0; injuries -= 1) {
    bytes = injure(bytes, random);
  }
  return bytes;
}

function placeIn(length: number, random: Random): number {
  const near = Math.min(length, 600);
  const where = random.below(10);
  if (where < 5) return random.below(near);
  return where < 8 ? length - 1 - random.below(near) : random.below(length);
}

function injure(bytes: Uint8Array, random: Random): Uint8Array {
  const at = placeIn(bytes.length, random);
  const length = 1 + random.below(random.below(2) === 0 ? 16 : 2000);
  switch (random.below(7)) {
    case 0:
      for (let k = 1 + random.below(8); k > 0; k -= 1) {
        bytes[placeIn(bytes.length, random)]! ^= 1 << random.below(8);
      }
      return bytes;
    case 1:
      bytes[at] = random.below(256);
      return bytes;
    case 2:
      return bytes.slice(0, at);
    case 3:
      return concatenate(bytes.subarray(0, at + length), bytes.subarray(at));
    case 4:
      return concatenate(bytes.subarray(0, at), bytes.subarray(at + length));
    case 5:
      return writeWord(bytes, at, random);
    default:
      return writeDigits(bytes, at, random);
  }
}

function concatenate(first: Uint8Array, second: Uint8Array): Uint8Array {
  const joined = new Uint8Array(first.length + second.length);
  joined.set(first);
  joined.set(second, first.length);
  return joined;
}

/** A number out of all proportion, in either order, where a length or a place may stand. */
function writeWord(bytes: Uint8Array, at: number, random: Random): Uint8Array {
  const word = hugeWords[random.below(hugeWords.length)]!;
  const size = [2, 4, 8][random.below(3)]!;
  const isLittle = random.below(2) === 0;
  for (let k = 0; k < size && at + k < bytes.length; k += 1) {
    bytes[at + k] = Number((word >> BigInt(8 * (isLittle ? k : size - 1 - k))) & 255n);
  }
  return bytes;
}

/** The same where numbers are text. */
function writeDigits(bytes: Uint8Array, at: number, random: Random): Uint8Array {
  const isDigit = (byte: number): boolean => byte >= 48 && byte <= 57;
  const found = bytes.subarray(at).findIndex(isDigit);
  const start = found < 0 ? at : at + found;
  for (let k = start; k < bytes.length && k < start + 1 + random.below(4); k += 1)
    bytes[k] = 48 + random.below(10);
  const more = new TextEncoder().encode('9'.repeat(random.below(14)));
  return random.below(2) === 0
    ? bytes
    : concatenate(concatenate(bytes.slice(0, start), more), bytes.slice(start));
}
