import type { ByteSource, CancelToken } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { openInflated } from './inflated-bytes';
import { findEntryData, type ZipEntry } from './zip-directory';

/** The bytes of an NPY file or of a member of an NPZ archive: what lies before, and how it is packed, is hidden. */
export interface ArrayBytes {
  readonly name: string;
  readonly size: number;
  /** Whether to go back means to unpack again from the start. */
  readonly isStream: boolean;
  /** Bytes [start, end), all of them. Throws `truncated` or `unreadable`. */
  read(start: number, end: number, token: CancelToken): Promise<Uint8Array>;
}

/** Deflate packs 258 bytes into 2 bits at best (RFC 1951): no member holds more than this many times its bytes. */
const mostDeflation = 1032;

export function plainBytes(source: ByteSource, start: number, size: number, name: string): ArrayBytes {
  return {
    name,
    size,
    isStream: false,
    read: async (from, to) => {
      const bytes = await source.read(start + from, start + to);
      if (bytes.length === to - from) return bytes;
      throw new Problem(
        'truncated',
        `Expected ${to - from} bytes from byte ${start + from} of ${source.name}, found ${bytes.length}; the file became shorter while it was read, open it again.`,
        `${source.name}, byte ${start + from + bytes.length}`,
      );
    },
  };
}

const methods: Record<number, string> = {
  1: 'shrink',
  6: 'implode',
  9: 'deflate64',
  12: 'bzip2',
  14: 'LZMA',
  93: 'Zstandard',
  95: 'xz',
  99: 'AES encryption',
};

/** A member of the archive, stored or deflated. Each call has its own place in the stream. */
export async function openEntry(source: ByteSource, entry: ZipEntry): Promise<ArrayBytes> {
  const place = `${source.name}, ${entry.name}`;
  if (entry.isEncrypted) {
    throw new Problem(
      'unsupported',
      `"${entry.name}" of ${source.name} is encrypted, which is not read; save it again by numpy.savez.`,
      place,
    );
  }
  if (entry.method !== 0 && entry.method !== 8) {
    const method = methods[entry.method] ?? `method ${entry.method}`;
    throw new Problem(
      'unsupported',
      `"${entry.name}" of ${source.name} is packed by ${method}, which is not read; save it again by numpy.savez or numpy.savez_compressed.`,
      place,
    );
  }
  const start = await findEntryData(source, entry);
  const isPossible =
    entry.method === 0 ? entry.bytes === entry.packedBytes : entry.bytes <= mostDeflation * entry.packedBytes;
  if (!isPossible) {
    throw new Problem(
      'unreadable',
      `"${entry.name}" of ${source.name} claims ${entry.bytes} bytes, more or less than its ${entry.packedBytes} packed ones can hold; it is damaged, copy or save it again.`,
      place,
    );
  }
  return entry.method === 0
    ? plainBytes(source, start, entry.bytes, place)
    : openInflated(source, entry, start, place);
}
