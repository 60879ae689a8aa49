import { randomUUID } from 'node:crypto';
import {
  existsSync,
  linkSync,
  mkdirSync,
  readFileSync,
  renameSync,
  unlinkSync,
  writeFileSync,
} from 'node:fs';
import { dirname } from 'node:path';
import { z } from '../../shared/util/zod';
import { StartProblem } from './refusal';

/**
 * One process at a time per data directory: two on one embedded database do not notice each other, and the rows of one
 * of them are lost; two on one maps folder may remove a map the other is about to name. The lock file names its holder by process id and, where the system tells it, by the moment the
 * process began, because ids are used again.
 */
const holderSchema = z.object({ pid: z.int().positive(), began: z.string().nullable(), token: z.string() });
type Holder = z.infer<typeof holderSchema>;

export interface ProcessLock {
  release(): void;
}

/** Takes the lock or throws StartProblem with the sentence that says who holds it. */
export function takeLock(path: string): ProcessLock {
  mkdirSync(dirname(path), { recursive: true, mode: 0o700 });
  const mine: Holder = { pid: process.pid, began: processBegan(process.pid), token: randomUUID() };
  // Written aside and linked into place, so that nobody ever reads a half-written lock.
  const draft = `${path}.${mine.token}`;
  writeFileSync(draft, JSON.stringify(mine), { flag: 'wx', mode: 0o600 });
  try {
    for (let attempt = 0; attempt < 5; attempt++) {
      if (tryLink(draft, path)) return { release: () => releaseLock(path, mine.token) };
      const text = readIfThere(path);
      if (text === null) continue;
      const holder = parseHolder(text);
      if (holder !== null && isRunning(holder)) {
        throw new StartProblem(
          `The data directory ${dirname(path)} is in use by another Gemel server (process ${holder.pid}). Stop that one, or set GEMEL_DATA to another directory.`,
        );
      }
      removeStale(path, text);
    }
    throw new StartProblem(`The lock ${path} could not be taken: other servers are starting on it now.`);
  } finally {
    unlinkSync(draft);
  }
}

function tryLink(draft: string, path: string): boolean {
  try {
    linkSync(draft, path);
    return true;
  } catch (error) {
    if (codeOf(error) === 'EEXIST') return false;
    throw error;
  }
}

/** Moves the dead holder's lock away; if another process was faster and the lock is already a new one, puts it back. */
function removeStale(path: string, expected: string): void {
  const aside = `${path}.${randomUUID()}`;
  try {
    renameSync(path, aside);
  } catch (error) {
    if (codeOf(error) === 'ENOENT') return;
    throw error;
  }
  if (readFileSync(aside, 'utf8') !== expected) tryLink(aside, path);
  unlinkSync(aside);
}

function releaseLock(path: string, token: string): void {
  const text = readIfThere(path);
  if (text !== null && parseHolder(text)?.token === token) unlinkSync(path);
}

function isRunning(holder: Holder): boolean {
  try {
    process.kill(holder.pid, 0);
  } catch (error) {
    // EPERM: it runs, under another user.
    if (codeOf(error) !== 'EPERM') return false;
  }
  const began = processBegan(holder.pid);
  return holder.began === null || began === null || began === holder.began;
}

/** Boot id and start time in clock ticks since boot, field 22 of /proc/<pid>/stat; null where there is no /proc. */
function processBegan(pid: number): string | null {
  const stat = `/proc/${pid}/stat`;
  const boot = '/proc/sys/kernel/random/boot_id';
  if (!existsSync(stat) || !existsSync(boot)) return null;
  const text = readIfThere(stat);
  // The second field is the command in brackets and may itself hold spaces and brackets.
  const ticks = text?.slice(text.lastIndexOf(')') + 2).split(' ')[19];
  return ticks === undefined ? null : `${readFileSync(boot, 'utf8').trim()}:${ticks}`;
}

function parseHolder(text: string): Holder | null {
  try {
    return holderSchema.parse(JSON.parse(text));
  } catch {
    // Not written by a running server (those link complete files), so nobody holds it.
    return null;
  }
}

function readIfThere(path: string): string | null {
  try {
    return readFileSync(path, 'utf8');
  } catch (error) {
    const code = codeOf(error);
    if (code === 'ENOENT' || code === 'ESRCH') return null;
    throw error;
  }
}

function codeOf(error: unknown): string | undefined {
  return error instanceof Error && 'code' in error ? String(error.code) : undefined;
}
