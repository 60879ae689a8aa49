import { createHash, randomUUID } from 'node:crypto';
import { mkdir, open, readFile, rename, rm } from 'node:fs/promises';
import { dirname, join } from 'node:path';
import { promisify } from 'node:util';
import { gunzip, gzip } from 'node:zlib';

const pack = promisify(gzip);
const unpack = promisify(gunzip);

/** Files named by the SHA-256 of their unpacked bytes: the same map is kept once, and a damaged one is noticed. */
export interface MapStore {
  /** On disk and synced when the promise resolves. */
  write(bytes: Uint8Array): Promise<{ hash: string; bytes: number }>;
  /** Unpacked bytes and the gzip stream as stored; null when the file is missing or does not match its name. */
  read(hash: string): Promise<{ raw: Buffer; gzip: Buffer } | null>;
  remove(hash: string): Promise<void>;
  /**
   * Runs one at a time: saving and removing must not cross, or a map in use could be removed. This holds within one
   * process; the lock of the data directory sees to it that there is no second one on the same folder.
   */
  alone<T>(work: () => Promise<T>): Promise<T>;
}

export function createMapStore(root: string): MapStore {
  let queue: Promise<unknown> = Promise.resolve();
  const pathOf = (hash: string): string => join(root, hash.slice(0, 2), `${hash}.gz`);
  const read: MapStore['read'] = async (hash) => {
    try {
      const stored = await readFile(pathOf(hash));
      const raw = await unpack(stored);
      return sha256(raw) === hash ? { raw, gzip: stored } : null;
    } catch (error) {
      if (isMissingOrDamaged(error)) return null;
      throw error;
    }
  };
  return {
    read,
    async write(bytes) {
      const hash = sha256(bytes);
      // A file already there is kept only if it still holds what its name says.
      if ((await read(hash)) === null) await writeSynced(pathOf(hash), await pack(bytes, { level: 3 }));
      return { hash, bytes: bytes.byteLength };
    },
    remove: (hash) => rm(pathOf(hash), { force: true }),
    alone(work) {
      const next = queue.then(work, work);
      // The caller hears of a failure through `next`; the queue only waits for the end.
      queue = next.catch(() => undefined);
      return next;
    },
  };
}

async function writeSynced(path: string, bytes: Uint8Array): Promise<void> {
  const folder = dirname(path);
  await mkdir(folder, { recursive: true, mode: 0o700 });
  const draft = `${path}.${randomUUID()}.tmp`;
  try {
    const file = await open(draft, 'wx', 0o600);
    try {
      await file.writeFile(bytes);
      await file.sync();
    } finally {
      await file.close();
    }
    await rename(draft, path);
  } catch (error) {
    await rm(draft, { force: true });
    throw error;
  }
  // The new name itself is durable only once its directory is synced.
  const directory = await open(folder, 'r');
  try {
    await directory.sync();
  } finally {
    await directory.close();
  }
}

function sha256(bytes: Uint8Array): string {
  return createHash('sha256').update(bytes).digest('hex');
}

function isMissingOrDamaged(error: unknown): boolean {
  const code = error instanceof Error && 'code' in error ? String(error.code) : '';
  return code === 'ENOENT' || code.startsWith('Z_') || code === 'ERR_BUFFER_TOO_LARGE';
}
