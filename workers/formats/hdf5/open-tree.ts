import type { ByteSource, ReaderEnvironment } from '../../../shared/contracts/reader';
import { openClassicTree } from './classic-tree';
import { openLibraryTree } from './library-tree';
import { readSuperblock } from './superblock';
import type { Hdf5Tree } from './tree';

/** The light reader where the bytes prove it exact, the full library for all else. */
export async function openTree(source: ByteSource, environment: ReaderEnvironment): Promise<Hdf5Tree> {
  const superblock = await readSuperblock(source);
  return (await openClassicTree(source, superblock)) ?? (await openLibraryTree(source, environment));
}
