import type { ByteSource } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';

/** Format signature of HDF5: 0x89 "HDF" CR LF 0x1A LF. */
const signature = [0x89, 0x48, 0x44, 0x46, 0x0d, 0x0a, 0x1a, 0x0a];

/** Where the superblock starts: 0, or 512 and its doublings after a user block. -1 when it is in none of these. */
export function findSuperblock(head: Uint8Array): number {
  for (let at = 0; at + signature.length <= head.length; at = at === 0 ? 512 : 2 * at) {
    if (signature.every((byte, k) => head[at + k] === byte)) return at;
  }
  return -1;
}

/** A file so short that only part of the signature is there. */
export function isCutSignature(head: Uint8Array): boolean {
  return head.length >= 4 && head.length < signature.length && head.every((byte, k) => byte === signature[k]);
}

export interface Superblock {
  at: number;
  version: number;
}

/**
 * The superblock, after making sure that the file is as long as it says. Versions 0 to 3 hold the address of the file's
 * end (HDF5 File Format Specification 3.0, II.A); a shorter file was cut, and what is missing cannot be told.
 */
export async function readSuperblock(source: ByteSource): Promise<Superblock> {
  const head = await source.read(0, 2 ** 16);
  const at = findSuperblock(head);
  if (at < 0) {
    if (isCutSignature(head)) throw truncated(source, 'at least 96 bytes');
    throw new Problem(
      'not-this-format',
      `Expected the signature of HDF5 at the start of ${source.name}, found other bytes; choose an HDF5 file or another layout.`,
      `${source.name}, byte 0`,
    );
  }
  const version = head[at + 8] ?? -1;
  // Position of the end-of-file address: after signature, versions, sizes, base and free-space or extension address.
  const endAt = at + (version === 0 ? 40 : version === 1 ? 44 : 28);
  if (source.size < endAt + 8)
    throw truncated(source, `a whole superblock of ${endAt - at + 8} bytes or more`);
  const view = new DataView(head.buffer, head.byteOffset, head.length);
  const offsetBytes = head[at + (version <= 1 ? 13 : 9)];
  if (version >= 0 && version <= 3 && offsetBytes === 8) {
    const end = view.getBigUint64(endAt, true);
    if (end > BigInt(source.size)) throw truncated(source, `${end} bytes, as its superblock says`);
  }
  return { at, version };
}

function truncated(source: ByteSource, expected: string): Problem {
  return new Problem(
    'truncated',
    `Expected ${source.name} to hold ${expected}, found ${source.size}; it was cut short, copy it again from where it was written.`,
    `${source.name}, byte ${source.size}`,
  );
}
