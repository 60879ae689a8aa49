import { statSync } from 'node:fs';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { basename, join } from 'node:path';
import { expect } from 'vitest';
import type { Layout } from '../../../shared/contracts/layout';
import type { ByteSource, Reader } from '../../../shared/contracts/reader';
import { Problem, type ProblemCode, type ProblemData } from '../../../shared/errors/problem';
import { openReader } from '../../../workers/formats/registry';
import { nodeEnvironment } from '../../../workers/pipeline/hdf5-node';
import { openPathSource } from '../../../workers/pipeline/node-source';
import { openBlobSource } from '../../../workers/pipeline/sources';

export const never = { cancelled: false };

/** Bytes in memory, seen as a picked file. */
export function memorySource(bytes: Uint8Array, name = 'unknown'): ByteSource {
  return openBlobSource({ name, size: bytes.length, file: new Blob([Uint8Array.from(bytes)]) });
}

export async function fileSource(path: string, name = basename(path)): Promise<ByteSource> {
  return openPathSource({ name, size: statSync(path).size, path });
}

/** Opens a file of HDF5 by a layout; what fails to open leaves no handle behind. */
export async function openFile(path: string, layout: Layout, name?: string): Promise<Reader> {
  const source = await fileSource(path, name);
  try {
    return await openReader(source, layout, nodeEnvironment);
  } catch (thrown) {
    await source.close();
    throw thrown;
  }
}

export async function makeFolder(): Promise<{ path(name: string): string; remove(): Promise<void> }> {
  const folder = await mkdtemp(join(tmpdir(), 'formats-'));
  return { path: (name) => join(folder, name), remove: () => rm(folder, { recursive: true, force: true }) };
}

export interface Tags {
  ticks: bigint[];
  channels: number[];
}

/** Tags of the ranges between the cuts, each read apart with its own offset, one after the other. */
export async function readTags(reader: Reader, cuts: readonly number[] = []): Promise<Tags> {
  const { facts } = reader;
  if (facts.kind !== 'tags') throw new Error('expected tags');
  const borders = [0, ...[...cuts].sort((a, b) => a - b), facts.records];
  const tags: Tags = { ticks: [], channels: [] };
  for (let k = 1; k < borders.length; k += 1) {
    const range = { start: borders[k - 1]!, end: borders[k]! };
    const offset = await reader.tickOffsetAt(range.start, never);
    let next = range.start;
    for await (const block of reader.read(range, offset, never)) {
      if (block.kind !== 'tags') throw new Error('expected tags');
      expect(block.firstRecord).toBe(next);
      next += block.records;
      for (let i = 0; i < block.count; i += 1) {
        const delta = block.deltaTick[i]!;
        if (!Number.isSafeInteger(delta)) throw new Error(`difference ${delta} is not exact`);
        tags.ticks.push(block.baseTick + BigInt(delta));
        tags.channels.push(block.channel[i]!);
      }
    }
    expect(next).toBe(range.end);
  }
  return tags;
}

/** All pixels of the ranges between the cuts. */
export async function readPixels(reader: Reader, cuts: readonly number[] = []): Promise<number[]> {
  const { facts } = reader;
  if (facts.kind !== 'frames') throw new Error('expected frames');
  const borders = [0, ...[...cuts].sort((a, b) => a - b), facts.frames];
  const pixels: number[] = [];
  for (let k = 1; k < borders.length; k += 1) {
    for await (const block of reader.read({ start: borders[k - 1]!, end: borders[k]! }, 0n, never)) {
      if (block.kind !== 'frames') throw new Error('expected frames');
      expect(block.pixels.length).toBe(block.count * block.width * block.height);
      for (const pixel of block.pixels) pixels.push(pixel);
    }
  }
  return pixels;
}

/** The problem that the work must end in. */
export async function problemOf(work: () => unknown, code: ProblemCode): Promise<ProblemData> {
  try {
    await work();
  } catch (thrown) {
    if (!(thrown instanceof Problem)) throw thrown;
    expect(thrown.code, thrown.message).toBe(code);
    expect(thrown.place, thrown.message).not.toBeNull();
    return thrown.toData();
  }
  throw new Error(`expected the problem ${code}, found none`);
}
