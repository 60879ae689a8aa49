import { type ChildProcess, spawn } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { createServer } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

export const root = fileURLToPath(new URL('../../../', import.meta.url));

export interface BuiltServer {
  url: string;
  dataDir: string;
  /** Stops it the way a person does and starts it again on the same data and port. */
  restart(): Promise<void>;
  /** Stops it and removes its data. */
  close(): Promise<void>;
}

/** The built server, as `npm start` runs it, on a data directory of its own. */
export async function startBuiltServer(): Promise<BuiltServer> {
  const dataDir = mkdtempSync(join(tmpdir(), 'gemel-e2e-'));
  const port = await freePort();
  const url = `http://127.0.0.1:${port}`;
  let child = await launch(dataDir, port, url);
  return {
    url,
    dataDir,
    async restart() {
      await stop(child);
      child = await launch(dataDir, port, url);
    },
    async close() {
      await stop(child);
      rmSync(dataDir, { recursive: true, force: true });
    },
  };
}

async function launch(dataDir: string, port: number, url: string): Promise<ChildProcess> {
  const child = spawn(process.execPath, ['dist/server/main.js'], {
    cwd: root,
    env: { PATH: process.env.PATH, GEMEL_DATA: dataDir, PORT: String(port), GEMEL_LOG: 'error' },
  });
  let output = '';
  child.stdout.on('data', (chunk: Buffer) => (output += chunk.toString()));
  child.stderr.on('data', (chunk: Buffer) => (output += chunk.toString()));
  for (let tries = 0; tries < 600; tries++) {
    if (child.exitCode !== null) throw new Error(`The server ended while starting: ${output}`);
    if (await isHealthy(url)) return child;
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
  throw new Error(`The server was not ready within a minute: ${output}`);
}

async function isHealthy(url: string): Promise<boolean> {
  try {
    return (await fetch(`${url}/api/health`)).status === 200;
  } catch (thrown) {
    // Refused until it listens.
    if (thrown instanceof TypeError) return false;
    throw thrown;
  }
}

function stop(child: ChildProcess): Promise<void> {
  if (child.exitCode !== null) return Promise.resolve();
  return new Promise((resolve) => {
    child.once('exit', () => resolve());
    child.kill('SIGTERM');
  });
}

function freePort(): Promise<number> {
  return new Promise((resolve) => {
    const probe = createServer().listen(0, '127.0.0.1', () => {
      const address = probe.address();
      probe.close(() => resolve(typeof address === 'object' && address !== null ? address.port : 0));
    });
  });
}
