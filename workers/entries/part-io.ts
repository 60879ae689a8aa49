import { open, rename } from 'node:fs/promises';
import { basename } from 'node:path';
import { Problem } from '../../shared/errors/problem';
import { openPathSource } from '../pipeline/node-source';
import { encodePart, type PartFile, readPart, readPartHead } from '../pipeline/part-file';
import type { PartHead } from '../pipeline/part-head';

/** Part files on disk. One that is there is whole: it gets its name when its last byte is written. */
export async function writePart(path: string, file: PartFile): Promise<number> {
  const pieces = await encodePart(file);
  const unfinished = `${path}.unfinished`;
  try {
    const handle = await open(unfinished, 'w');
    try {
      for (const piece of pieces) await handle.writeFile(piece);
    } finally {
      await handle.close();
    }
    await rename(unfinished, path);
  } catch (thrown) {
    const why = thrown instanceof Error ? thrown.message : String(thrown);
    throw new Problem('unreadable', `The part ${path} cannot be written: ${why}; check the folder.`, path);
  }
  return pieces.reduce((sum, piece) => sum + piece.length, 0);
}

export function loadPart(path: string): Promise<PartFile> {
  return withSource(path, readPart);
}

export function loadPartHead(path: string): Promise<PartHead> {
  return withSource(path, readPartHead);
}

async function withSource<T>(
  path: string,
  use: (source: Awaited<ReturnType<typeof openPathSource>>) => Promise<T>,
): Promise<T> {
  const source = await openPathSource({ name: basename(path), path, size: 0 });
  try {
    return await use(source);
  } finally {
    await source.close();
  }
}
