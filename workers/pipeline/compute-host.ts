import { createSHA256 } from 'hash-wasm';
import type { SourceRef } from '../../shared/contracts/engine';
import type { Outcome } from '../../shared/contracts/outcome';
import type { ByteSource, CancelToken, Reader, ReadRange } from '../../shared/contracts/reader';
import { Cancelled } from '../../shared/errors/problem';
import { createAccumulator } from '../accumulators/accumulator';
import { inspectSource } from '../formats/registry';
import { createRecordDecoding } from '../kernels/tag-decode';
import { answer } from './answer';
import type { AskOffset, ComputeHost, OnTaskProgress } from './compute';
import { findClock } from './find-clock';
import { type CompileKernels, loadKernels } from './kernels';
import { type InputPlatform, keyOfInput, openInput, type ReadInput } from './read-input';

export interface ComputePlatform extends InputPlatform {
  compileKernels: CompileKernels;
  /** The platform's own SHA-256, where it has one that takes bytes piece by piece: several times as fast. */
  createSha256?: () => Sha256;
}

interface Sha256 {
  update(bytes: Uint8Array): unknown;
  digest(encoding: 'hex'): string;
}

/** Opened readers kept between tasks: opening HDF5 costs tens of milliseconds, and a file is read in many tasks. */
const READERS_KEPT = 4;
/** A slice of the file while hashing it. */
const HASH_BYTES = 8 * 2 ** 20;
const REPORT_EVERY_MS = 100;

interface OpenReader {
  key: string | null;
  reader: Reader;
}

export function createComputeHost(platform: ComputePlatform): ComputeHost {
  const kernels = loadKernels(platform.compileKernels);
  const records = kernels.then(({ tags }) => (tags === null ? undefined : createRecordDecoding(tags)));
  const open: OpenReader[] = [];
  const tokens = new Map<string, { cancelled: boolean }>();

  async function withSource<T>(ref: SourceRef, use: (source: ByteSource) => Promise<T>): Promise<T> {
    const source = await platform.openSource(ref);
    try {
      return await use(source);
    } finally {
      await source.close();
    }
  }

  async function readerFor(input: ReadInput): Promise<Reader> {
    const key = keyOfInput(input);
    const at = open.findIndex((kept) => kept.key === key);
    if (at >= 0 && key !== null) {
      const [kept] = open.splice(at, 1);
      open.push(kept!);
      return kept!.reader;
    }
    while (open.length >= READERS_KEPT) await open.shift()!.reader.close();
    // Two files merged hold blocks of one while they read the other: those must own their columns.
    const environment =
      input.companion === undefined
        ? { ...platform.environment, records: await records }
        : platform.environment;
    const reader = await openInput(input, { ...platform, environment });
    open.push({ key, reader });
    return reader;
  }

  async function asTask<T>(taskId: string, work: (token: CancelToken) => Promise<T>): Promise<Outcome<T>> {
    const token = { cancelled: false };
    tokens.set(taskId, token);
    try {
      return await answer(() => work(token));
    } finally {
      tokens.delete(taskId);
    }
  }

  return {
    inspect: (ref, layout) =>
      answer(
        () => withSource(ref, (source) => inspectSource(source, layout, platform.environment)),
        ref.name,
      ),
    facts: (input) => answer(async () => (await readerFor(input)).facts, input.source.name),
    count: (task, onProgress, askOffset) =>
      asTask(task.taskId, async (token) => {
        const reader = await readerFor(task.input);
        const offset = await offsetOf(reader, task.range, token, askOffset);
        const accumulator = createAccumulator(task.spec, await kernels, task.leastBits);
        try {
          const report = createReport(onProgress);
          for await (const block of reader.read(task.range, offset, token)) {
            accumulator.push(block);
            report.add(block.bytes, block.kind === 'tags' ? block.records : block.count);
          }
          report.flush();
          return accumulator.toPart();
        } finally {
          accumulator.release?.();
        }
      }),
    findClock: (taskId, input, onProgress) =>
      asTask(taskId, async (token) => {
        const report = createReport(onProgress);
        const clock = await findClock(input, platform, token, (bytes) => report.add(bytes, 0));
        report.flush();
        return clock;
      }),
    fingerprint: (taskId, ref, onProgress) =>
      asTask(taskId, (token) =>
        withSource(ref, async (source) => hashSource(source, await createHash(platform), token, onProgress)),
      ),
    async cancel(taskId) {
      const token = tokens.get(taskId);
      if (token !== undefined) token.cancelled = true;
    },
  };
}

/** Ticks of the rollovers before the range, from whoever knows them. */
async function offsetOf(
  reader: Reader,
  range: ReadRange,
  token: CancelToken,
  askOffset: AskOffset | undefined,
): Promise<bigint> {
  if (askOffset === undefined || reader.advanceOf === undefined) {
    return reader.tickOffsetAt(range.start, token);
  }
  const offset = await askOffset(await reader.advanceOf(range, token));
  if (offset === null) throw new Cancelled();
  return offset;
}

async function createHash({ createSha256 }: ComputePlatform): Promise<Sha256> {
  return createSha256 === undefined ? (await createSHA256()).init() : createSha256();
}

async function hashSource(
  source: ByteSource,
  hash: Sha256,
  token: CancelToken,
  onProgress: OnTaskProgress,
): Promise<string> {
  const report = createReport(onProgress);
  for (let start = 0; start < source.size; start += HASH_BYTES) {
    if (token.cancelled) throw new Cancelled();
    const bytes = await source.read(start, Math.min(start + HASH_BYTES, source.size));
    hash.update(bytes);
    report.add(bytes.length, 0);
  }
  report.flush();
  return hash.digest('hex');
}

/** Messages cost more than blocks: progress goes out at most ten times a second. */
function createReport(onProgress: OnTaskProgress): {
  add(bytes: number, records: number): void;
  flush(): void;
} {
  let bytes = 0;
  let records = 0;
  let last = performance.now();
  const flush = (): void => {
    if (bytes === 0 && records === 0) return;
    onProgress({ bytes, records });
    bytes = 0;
    records = 0;
    last = performance.now();
  };
  return {
    add(moreBytes, moreRecords) {
      bytes += moreBytes;
      records += moreRecords;
      if (performance.now() - last >= REPORT_EVERY_MS) flush();
    },
    flush,
  };
}
