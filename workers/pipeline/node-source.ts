import { type FileHandle, open } from 'node:fs/promises';
import type { SourceRef } from '../../shared/contracts/engine';
import type { ByteSource } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';

/** Bytes of a file on disk (Node only). The size is the file's own; the one in `ref` is not trusted. */
export async function openPathSource(ref: SourceRef): Promise<ByteSource> {
  const { path, name } = ref;
  if (path === undefined) {
    throw new Problem(
      'missing-input',
      `Expected a path for ${name}, found none; name the file to read.`,
      name,
    );
  }
  const handle = await openHandle(path);
  const stat = await handle.stat();
  if (!stat.isFile()) {
    await handle.close();
    throw new Problem(
      'unreadable',
      `Expected a file at ${path}, found a folder or device; name a file.`,
      path,
    );
  }
  const { size } = stat;
  return {
    name,
    size,
    ref: { ...ref, size },
    read: (start, end, into) => {
      const from = Math.min(Math.max(0, start), size);
      return readFully(handle, from, Math.min(Math.max(from, end), size), path, into);
    },
    close: () => handle.close(),
  };
}

async function openHandle(path: string): Promise<FileHandle> {
  try {
    return await open(path, 'r');
  } catch (thrown) {
    const code = thrown instanceof Error && 'code' in thrown ? thrown.code : undefined;
    if (code === 'ENOENT' || code === 'ENOTDIR') {
      throw new Problem('unreadable', `There is no file at ${path}; check the name and the folder.`, path);
    }
    if (code === 'EACCES' || code === 'EPERM') {
      throw new Problem(
        'unreadable',
        `${path} may not be read by this account; change its permissions.`,
        path,
      );
    }
    const detail = thrown instanceof Error ? thrown.message : String(thrown);
    throw new Problem(
      'unreadable',
      `${path} could not be opened (${detail}); check the name and the disk.`,
      path,
    );
  }
}

/** A read may give fewer bytes than asked, so it is repeated; a file that became shorter gives what is left. */
async function readFully(
  handle: FileHandle,
  start: number,
  end: number,
  path: string,
  into: Uint8Array | undefined,
): Promise<Uint8Array> {
  const bytes =
    into !== undefined && into.length >= end - start
      ? into.subarray(0, end - start)
      : // Not zero-filled and outside the pool of small buffers: its memory can be transferred.
        new Uint8Array(Buffer.allocUnsafeSlow(end - start).buffer);
  let filled = 0;
  while (filled < bytes.length) {
    const { bytesRead } = await readOnce(handle, bytes, filled, start + filled, path);
    if (bytesRead === 0) return bytes.subarray(0, filled);
    filled += bytesRead;
  }
  return bytes;
}

async function readOnce(
  handle: FileHandle,
  into: Uint8Array,
  offset: number,
  position: number,
  path: string,
): Promise<{ bytesRead: number }> {
  try {
    return await handle.read(into, offset, into.length - offset, position);
  } catch (thrown) {
    const detail = thrown instanceof Error ? thrown.message : String(thrown);
    throw new Problem(
      'unreadable',
      `${path} could not be read from byte ${position} on (${detail}); check the disk and try again.`,
      `${path}, byte ${position}`,
    );
  }
}
