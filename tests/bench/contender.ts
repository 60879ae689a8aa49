import { type ChildProcess, spawn } from 'node:child_process';
import { readFileSync, writeFileSync } from 'node:fs';
import { readFile, rm } from 'node:fs/promises';
import { createInterface } from 'node:readline';
import { z } from '../../shared/util/zod';

/**
 * One of the programs that are compared: a process of its own that keeps its data in memory and works when asked, so
 * that passes of several contenders alternate. Lines of the conversation: tests/bench/numpy/serve.py.
 */
export interface Contender {
  readonly name: string;
  pass(items: number): Promise<Pass>;
  /** Numbers of the last pass; `path` is a file it may use meanwhile. */
  answer(path: string): Promise<Float64Array>;
  /** Largest resident memory since `forgetPeak`; null where the system does not tell. */
  peakMB(): number | null;
  /** What loading took is not the work's. */
  forgetPeak(): void;
  stop(): Promise<void>;
}

export interface Pass {
  /** Processor seconds of the whole process, user and system. */
  cpu: number;
  wall: number;
}

const passSchema = z.object({ cpu: z.number(), wall: z.number() });

/** One thread each, and an allocator that keeps its pages between temporaries, which NumPy gains most from. */
const environment = {
  ...process.env,
  OPENBLAS_NUM_THREADS: '1',
  OMP_NUM_THREADS: '1',
  PYTHONDONTWRITEBYTECODE: '1',
  MALLOC_MMAP_THRESHOLD_: String(10 ** 9),
  MALLOC_TRIM_THRESHOLD_: String(2 * 10 ** 9),
  MALLOC_TOP_PAD_: String(2 ** 26),
};

export async function startContender(
  name: string,
  command: string,
  args: readonly string[],
  variables: Record<string, string> = {},
): Promise<Contender> {
  const env = { ...environment, ...variables };
  const child = spawn(command, args, { env, stdio: ['pipe', 'pipe', 'inherit'] });
  const ended = new Promise<void>((resolve) => child.once('close', () => resolve()));
  const lines = createInterface({ input: child.stdout! })[Symbol.asyncIterator]();
  const reply = async (): Promise<unknown> => {
    const { value, done } = await lines.next();
    if (done) throw new Error(`${name} ended before it answered; its own message stands above.`);
    return JSON.parse(value);
  };
  const ask = (line: string): Promise<unknown> => {
    child.stdin!.write(`${line}\n`);
    return reply();
  };
  await reply();
  return {
    name,
    pass: async (items) => passSchema.parse(await ask(`pass ${items}`)),
    async answer(path) {
      await ask(`answer ${path}`);
      const bytes = await readFile(path);
      await rm(path);
      return new Float64Array(bytes.buffer, bytes.byteOffset, bytes.byteLength / 8).slice();
    },
    peakMB: () => readPeakMB(child),
    forgetPeak() {
      if (process.platform === 'linux') writeFileSync(`/proc/${child.pid}/clear_refs`, '5');
    },
    async stop() {
      child.stdin!.end();
      await ended;
    },
  };
}

function readPeakMB({ pid }: ChildProcess): number | null {
  if (process.platform !== 'linux' || pid === undefined) return null;
  const kibibytes = /VmHWM:\s+(\d+) kB/.exec(readFileSync(`/proc/${pid}/status`, 'utf8'))?.[1];
  return kibibytes === undefined ? null : Number(kibibytes) / 1024;
}
