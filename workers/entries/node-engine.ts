import { stat } from 'node:fs/promises';
import { availableParallelism } from 'node:os';
import { basename, resolve } from 'node:path';
import { Worker } from 'node:worker_threads';
import type { Endpoint } from 'comlink';
import nodeEndpoint from 'comlink/dist/esm/node-adapter.mjs';
import type { Engine, EngineOptions, SourceRef } from '../../shared/contracts/engine';
import { Problem } from '../../shared/errors/problem';
import { connectCompute } from '../pipeline/compute-remote';
import { createEngine } from '../pipeline/engine';
import { compileKernels } from '../pipeline/kernels-node';
import { openPathSource } from '../pipeline/node-source';
import { createShardEngine, type ShardEngine } from '../pipeline/shards';

/** Beside this file, in the sources and in the bundle alike. */
const built = !import.meta.url.endsWith('.ts');

/** Threads do not inherit the hooks that let Node run TypeScript (Node 20), so each registers them before it starts. */
const boot = `import('tsx/esm/api').then(({ register }) => {
  register();
  return import(${JSON.stringify(new URL('./compute.node.ts', import.meta.url).href)});
});`;

export interface NodeEngine {
  engine: Engine;
  /** Pieces of a run, over the same threads: one of the two at a time. */
  shards: ShardEngine;
  close(): Promise<void>;
}

/**
 * The engine over worker threads, each started with its first task. `onCrash` hears of a thread that died (out of
 * memory, say): its task never answers. No pairs are kept unless asked for: most often one run is all there is.
 */
export function startNodeEngine(
  workers: number,
  onCrash: (error: Error) => void,
  options: EngineOptions = { pairBytes: 0 },
): NodeEngine {
  const threads: Worker[] = [];
  const start = (): Endpoint => {
    const thread = built
      ? new Worker(new URL('compute.node.js', import.meta.url))
      : new Worker(boot, { eval: true, execArgv: [] });
    thread.on('error', onCrash);
    threads.push(thread);
    return nodeEndpoint(thread);
  };
  const hosts = Array.from({ length: workers }, () => connectCompute(lazyEndpoint(start)));
  return {
    engine: createEngine(hosts, options, compileKernels),
    shards: createShardEngine(hosts, openPathSource, compileKernels),
    async close() {
      await Promise.all(threads.map((thread) => thread.terminate()));
    },
  };
}

/** Starts the other end when there is something to say to it. */
function lazyEndpoint(start: () => Endpoint): Endpoint {
  type Listener = Parameters<Endpoint['addEventListener']>;
  const listeners: Listener[] = [];
  let started: Endpoint | null = null;
  return {
    postMessage(message, transfer) {
      if (started === null) {
        started = start();
        for (const listener of listeners) started.addEventListener(...listener);
      }
      started.postMessage(message, transfer);
    },
    addEventListener(...listener) {
      listeners.push(listener);
      started?.addEventListener(...listener);
    },
    removeEventListener(...listener) {
      const at = listeners.findIndex(([type, handler]) => type === listener[0] && handler === listener[1]);
      if (at >= 0) listeners.splice(at, 1);
      started?.removeEventListener(...listener);
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
