import { createSHA256, type IHasher } from 'hash-wasm';
import type { ByteSource } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';
import { z } from '../../shared/util/zod';
import {
  arrayOver,
  arrayTypeNames,
  bytesPerElement,
  type Frozen,
  type FrozenArray,
  freeze,
  thaw,
  typeOfArray,
} from './freeze';
import { type PartHead, partHeadSchema } from './part-head';

/**
 * A part file, version 1: what one shard of a run has counted. Little-endian.
 *
 *   0  8  magic "GEMELPRT"            24  8  zero
 *   8  4  version                     32 32  SHA-256 of all bytes from 64 on
 *  12  4  bytes of the JSON head      64  -  JSON head {head, parts, arrays}
 *  16  8  bytes of the whole file          -  the arrays, one after the other
 *
 * Head and arrays are each filled up with zeros to a multiple of 8. `arrays` lists type and length of each, so the
 * length of a whole file follows from its head and is compared with the file before anything is allocated.
 */
const MAGIC = 'GEMELPRT';
const VERSION = 1;
const FIXED = 64;
/** Detector maps and layouts of some inputs; a real head is a thousand times shorter. */
const LONGEST_HEAD = 64 * 2 ** 20;
const SLICE = 16 * 2 ** 20;

export interface PartFile {
  head: PartHead;
  /** By input: what its accumulator has counted. Plain data that nobody has looked into yet when it comes from a file. */
  parts: Record<string, unknown>;
}

const contentSchema = z.strictObject({
  head: partHeadSchema,
  parts: z.record(z.string(), z.json()),
  arrays: z.array(z.tuple([z.enum(arrayTypeNames), z.int().min(0)])).max(1e6),
});
type Content = z.infer<typeof contentSchema>;

/** The file in pieces, to be written one after the other: large arrays are not copied. */
export async function encodePart(file: PartFile): Promise<Uint8Array[]> {
  const arrays: FrozenArray[] = [];
  const parts = Object.fromEntries(
    Object.entries(file.parts).map(([name, part]) => [name, freeze(part, arrays)]),
  );
  const list = arrays.map((array): [string, number] => [typeOfArray(array), array.length]);
  const text = new TextEncoder().encode(JSON.stringify({ head: file.head, parts, arrays: list }));
  const pieces = [...padded(text), ...arrays.flatMap((array) => padded(bytesOf(array)))];
  const hash = await createSHA256();
  hash.init();
  for (const piece of pieces) hash.update(piece);
  const fixed = new Uint8Array(FIXED);
  const view = new DataView(fixed.buffer);
  fixed.set(new TextEncoder().encode(MAGIC));
  view.setUint32(8, VERSION, true);
  view.setUint32(12, text.length, true);
  view.setBigUint64(16, BigInt(FIXED + pieces.reduce((sum, piece) => sum + piece.length, 0)), true);
  fixed.set(hash.digest('binary'), 32);
  return [fixed, ...pieces];
}

/** Who counted what: cheap, and enough to see whether parts belong together. The arrays are not read. */
export async function readPartHead(source: ByteSource): Promise<PartHead> {
  return (await readContent(source)).content.head;
}

/** @throws Problem with the byte: not a part, newer than this engine, cut short, too long, or damaged. */
export async function readPart(source: ByteSource): Promise<PartFile> {
  const { content, text, sha256 } = await readContent(source);
  const hash = await createSHA256();
  hash.init();
  hash.update(text);
  const arrays: FrozenArray[] = [];
  let at = FIXED + text.length;
  for (const [type, length] of content.arrays) {
    const bytes = await readBytes(source, at, length * bytesPerElement(type), hash);
    arrays.push(arrayOver(type, bytes, length));
    at += bytes.byteLength;
  }
  if (hash.digest('hex') !== sha256) {
    throw new Problem(
      'unreadable',
      `${source.name} is not as it was written: its SHA-256 does not fit. Copy it again, or count this shard again.`,
      source.name,
    );
  }
  const parts = Object.entries(content.parts).map(([name, part]) => [name, thaw(part as Frozen, arrays)]);
  return { head: content.head, parts: Object.fromEntries(parts) };
}

async function readContent(
  source: ByteSource,
): Promise<{ content: Content; text: Uint8Array; sha256: string }> {
  const fixed = await source.read(0, FIXED);
  const { headBytes, totalBytes, sha256 } = readFixed(fixed, source);
  if (headBytes > Math.min(LONGEST_HEAD, totalBytes - FIXED)) {
    throw damaged(source, 12, `a head of ${headBytes} bytes`);
  }
  const text = await source.read(FIXED, FIXED + toEight(headBytes));
  const content = parseContent(text.subarray(0, headBytes), source);
  const arrayBytes = content.arrays.reduce((sum, [type, n]) => sum + toEight(n * bytesPerElement(type)), 0);
  if (FIXED + toEight(headBytes) + arrayBytes !== totalBytes) {
    throw damaged(source, FIXED, `arrays of ${arrayBytes} bytes in a file of ${totalBytes}`);
  }
  return { content, text, sha256 };
}

function readFixed(
  fixed: Uint8Array,
  source: ByteSource,
): { headBytes: number; totalBytes: number; sha256: string } {
  const magic = new TextDecoder('latin1').decode(fixed.subarray(0, MAGIC.length));
  if (magic !== MAGIC) {
    throw new Problem(
      'not-this-format',
      `${source.name} is not a part of a run; name the files that "run --shard" wrote.`,
      `${source.name}, byte 0`,
    );
  }
  if (fixed.length < FIXED) throw cutShort(source, FIXED);
  const view = new DataView(fixed.buffer, fixed.byteOffset, FIXED);
  const version = view.getUint32(8, true);
  if (version > VERSION) {
    throw new Problem(
      'newer-version',
      `${source.name} is a part of version ${version}, and this engine knows version ${VERSION}; combine with the engine that wrote it.`,
      `${source.name}, byte 8`,
    );
  }
  const totalBytes = Number(view.getBigUint64(16, true));
  if (version < 1) throw damaged(source, 8, 'version 0');
  if (source.size < totalBytes) throw cutShort(source, totalBytes);
  if (source.size > totalBytes || totalBytes < FIXED) {
    throw new Problem(
      'wrong-length',
      `${source.name} has ${source.size} bytes where its head says ${totalBytes}; copy it again, or count this shard again.`,
      `${source.name}, byte ${totalBytes}`,
    );
  }
  const sha256 = [...fixed.subarray(32, 64)].map((byte) => byte.toString(16).padStart(2, '0')).join('');
  return { headBytes: view.getUint32(12, true), totalBytes, sha256 };
}

function parseContent(text: Uint8Array, source: ByteSource): Content {
  let value: unknown;
  try {
    value = JSON.parse(new TextDecoder('utf-8', { fatal: true }).decode(text));
  } catch (thrown) {
    throw damaged(source, FIXED, thrown instanceof Error ? thrown.message : String(thrown));
  }
  const parsed = contentSchema.safeParse(value);
  if (parsed.success) return parsed.data;
  const [issue] = parsed.error.issues;
  throw damaged(source, FIXED, `${issue?.path.join('.') ?? ''}: ${issue?.message ?? 'no content'}`);
}

/** Bytes of one array with its filling, hashed slice by slice. */
async function readBytes(
  source: ByteSource,
  start: number,
  length: number,
  hash: IHasher,
): Promise<ArrayBuffer> {
  const bytes = new Uint8Array(toEight(length));
  for (let at = 0; at < bytes.length; at += SLICE) {
    const slice = await source.read(start + at, start + Math.min(at + SLICE, bytes.length));
    if (slice.length !== Math.min(SLICE, bytes.length - at)) throw cutShort(source, start + bytes.length);
    hash.update(slice);
    bytes.set(slice, at);
  }
  return bytes.buffer;
}

function cutShort(source: ByteSource, expected: number): Problem {
  return new Problem(
    'truncated',
    `${source.name} ends after ${source.size} bytes where ${expected} were written; copy it again, or count this shard again.`,
    `${source.name}, byte ${source.size}`,
  );
}

function damaged(source: ByteSource, byte: number, found: string): Problem {
  return new Problem(
    'unreadable',
    `${source.name} is damaged: ${found}; copy it again, or count this shard again.`,
    `${source.name}, byte ${byte}`,
  );
}

function bytesOf(array: FrozenArray): Uint8Array {
  return new Uint8Array(array.buffer, array.byteOffset, array.byteLength);
}

function padded(bytes: Uint8Array): Uint8Array[] {
  const missing = toEight(bytes.length) - bytes.length;
  return missing === 0 ? [bytes] : [bytes, new Uint8Array(missing)];
}

function toEight(bytes: number): number {
  return Math.ceil(bytes / 8) * 8;
}
