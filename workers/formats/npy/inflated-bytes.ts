import { Inflate } from 'fflate';
import type { ByteSource, CancelToken } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { passTurn } from '../turn';
import type { ArrayBytes } from './array-bytes';
import { updateCrc32 } from './crc32';
import type { ZipEntry } from './zip-directory';

/** Packed bytes read at once, and given to the unpacker at once: 16 KiB become 16 MiB at most. */
const readBytes = 2 ** 20;
const pushedBytes = 2 ** 14;
/** Unpacked between two looks at the cancel flag. */
const turnBytes = 2 ** 23;

/**
 * A deflated member, unpacked as it is asked for: what is asked in rising order is unpacked once, what lies behind is
 * unpacked again from the start. Holds one push of unpacked bytes. Who reads to the end has its checksum compared.
 */
export function openInflated(source: ByteSource, entry: ZipEntry, start: number, place: string): ArrayBytes {
  let stream = startStream(source, entry, start, place);
  return {
    name: place,
    size: entry.bytes,
    isStream: true,
    read: async (from, to, token) => {
      if (to > entry.bytes) throw short(place, from, to, entry.bytes);
      if (from < stream.position()) stream = startStream(source, entry, start, place);
      await stream.skip(from - stream.position(), token);
      const bytes = new Uint8Array(to - from);
      await stream.fill(bytes, token);
      return bytes;
    },
  };
}

interface Stream {
  position(): number;
  skip(bytes: number, token: CancelToken): Promise<void>;
  fill(bytes: Uint8Array, token: CancelToken): Promise<void>;
}

function startStream(source: ByteSource, entry: ZipEntry, start: number, place: string): Stream {
  const unpacked: Uint8Array[] = [];
  let position = 0;
  let produced = 0;
  let crc = 0;
  let packedAt = 0;
  let packed: Uint8Array = new Uint8Array(0);
  let sinceTurn = 0;
  const inflate = new Inflate((chunk) => {
    unpacked.push(chunk);
    produced += chunk.length;
    sinceTurn += chunk.length;
    crc = updateCrc32(crc, chunk);
  });

  async function unpackMore(token: CancelToken): Promise<void> {
    if (packedAt >= entry.packedBytes) throw short(place, position, entry.bytes, produced);
    if (packed.length === 0) {
      packed = await source.read(start + packedAt, start + Math.min(entry.packedBytes, packedAt + readBytes));
      if (packed.length === 0) throw short(place, position, entry.bytes, produced);
    }
    if (sinceTurn >= turnBytes) {
      sinceTurn = 0;
      await passTurn(token);
    }
    const part = packed.subarray(0, pushedBytes);
    packed = packed.subarray(part.length);
    packedAt += part.length;
    push(part, packedAt === entry.packedBytes);
    const isDone = packedAt === entry.packedBytes;
    if (produced > entry.bytes || (isDone && (produced < entry.bytes || crc !== entry.crc))) {
      throw damaged(
        produced === entry.bytes ? 'another checksum' : `${produced > entry.bytes ? 'more' : produced} bytes`,
      );
    }
  }

  function push(part: Uint8Array, isLast: boolean): void {
    try {
      inflate.push(part, isLast);
    } catch (thrown) {
      // fflate throws its own errors with a text such as "invalid distance".
      throw damaged(thrown instanceof Error ? thrown.message : String(thrown));
    }
  }

  function damaged(found: string): Problem {
    return new Problem(
      'unreadable',
      `Expected ${entry.bytes} bytes of deflated data in ${place}, found ${found}; it is damaged, copy or save it again.`,
      `${source.name}, byte ${start + packedAt}`,
    );
  }

  async function take(bytes: number, into: Uint8Array | null, token: CancelToken): Promise<void> {
    for (let taken = 0; taken < bytes; ) {
      const head = unpacked[0];
      if (head === undefined) {
        await unpackMore(token);
        continue;
      }
      const part = head.subarray(0, bytes - taken);
      into?.set(part, taken);
      taken += part.length;
      position += part.length;
      if (part.length === head.length) unpacked.shift();
      else unpacked[0] = head.subarray(part.length);
    }
    // The checksum comes with the last bytes of the packed data, which may follow the last byte asked for.
    if (position === entry.bytes) while (packedAt < entry.packedBytes) await unpackMore(token);
  }

  return {
    position: () => position,
    skip: (bytes, token) => take(bytes, null, token),
    fill: (bytes, token) => take(bytes.length, bytes, token),
  };
}

function short(place: string, from: number, to: number, found: number): Problem {
  return new Problem(
    'truncated',
    `Expected bytes ${from} to ${to} of ${place}, found ${found}; it was cut short, copy or save it again.`,
    `${place}, byte ${found}`,
  );
}
