import { stat } from 'node:fs/promises';
import { availableParallelism } from 'node:os';
import { basename, resolve } from 'node:path';
import { Worker } from 'node:worker_threads';
import nodeEndpoint from 'comlink/dist/esm/node-adapter.mjs';
import type { Engine, SourceRef } from '../../shared/contracts/engine';
import { Problem } from '../../shared/errors/problem';
import { connectCompute } from '../pipeline/compute-remote';
import { createEngine } from '../pipeline/engine';

/** Threads do not inherit the hooks that let Node run TypeScript (Node 20), so each registers them before it starts. */
const boot = `import('tsx/esm/api').then(({ register }) => {
  register();
  return import(${JSON.stringify(new URL('./compute.node.ts', import.meta.url).href)});
});`;

export interface NodeEngine {
  engine: Engine;
  close(): Promise<void>;
}

/** The engine over worker threads. `onCrash` hears of a thread that died (out of memory, say): its task never answers. */
export function startNodeEngine(workers: number, onCrash: (error: Error) => void): NodeEngine {
  const threads = Array.from({ length: workers }, () => {
    const thread = new Worker(boot, { eval: true, execArgv: [] });
    thread.on('error', onCrash);
    return thread;
  });
  return {
    engine: createEngine(threads.map((thread) => connectCompute(nodeEndpoint(thread)))),
    async close() {
      await Promise.all(threads.map((thread) => thread.terminate()));
    },
  };
}

export function defaultWorkers(): number {
  return Math.max(1, Math.min(8, availableParallelism()));
}

/** A file as the engine wants it. Throws `unreadable` or `bad-input` when there is none. */
export async function sourceOfPath(path: string): Promise<SourceRef> {
  const full = resolve(path);
  try {
    const facts = await stat(full);
    if (!facts.isFile()) {
      throw new Problem(
        'bad-input',
        `${path} is not a file; name the file that the acquisition wrote.`,
        path,
      );
    }
    return { name: basename(full), size: facts.size, path: full, key: `${full} ${facts.mtimeMs}` };
  } catch (thrown) {
    if (thrown instanceof Problem) throw thrown;
    const why =
      thrown instanceof Error && 'code' in thrown && thrown.code === 'ENOENT'
        ? 'there is no such file'
        : String(thrown);
    throw new Problem('unreadable', `${path} cannot be read: ${why}; check the name and the rights.`, path);
  }
}
