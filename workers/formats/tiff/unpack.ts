import { Inflate, inflateSync } from 'fflate';
import type { Compression } from './geometry';
import { unpackLzw } from './lzw';

/** What is wrong with packed bytes, as the end of a sentence that begins with "found". */
export class Unpackable extends Error {}

/** How many bytes one packed byte can hold at best: RFC 1951; 12 bits for a string of 3837; 2 bytes for 128. */
export const mostUnpacking: Record<Compression, number> = { none: 1, deflate: 1032, lzw: 2560, packbits: 64 };

/** Packed parts up to this length are unpacked at once, because what they may hold is bounded. */
const quickBytes = 2 ** 16;
const pushedBytes = 2 ** 14;

/** Fills `into` with the part. Throws `Unpackable`. */
export function unpackPart(packed: Uint8Array, compression: Compression, into: Uint8Array): void {
  if (packed.length * mostUnpacking[compression] < into.length) {
    throw new Unpackable(`${packed.length} bytes, which cannot hold ${into.length}`);
  }
  const filled =
    compression === 'deflate'
      ? unpackDeflate(packed, into)
      : compression === 'lzw'
        ? unpackLzw(packed, into)
        : compression === 'packbits'
          ? unpackBits(packed, into)
          : copy(packed, into);
  if (filled === into.length) return;
  throw new Unpackable(filled < 0 ? 'a code that is none' : `${filled} of ${into.length} bytes`);
}

function copy(packed: Uint8Array, into: Uint8Array): number {
  into.set(packed.subarray(0, into.length));
  return into.length;
}

/** The zlib format (RFC 1950): two bytes, deflated data, Adler-32 of what was packed. */
function unpackDeflate(packed: Uint8Array, into: Uint8Array): number {
  const isZlib = packed.length > 6 && (packed[0]! & 15) === 8 && ((packed[0]! << 8) | packed[1]!) % 31 === 0;
  if (!isZlib || (packed[1]! & 32) !== 0) throw new Unpackable('no zlib data');
  const body = packed.subarray(2);
  try {
    const filled = packed.length <= quickBytes ? inflateQuick(body, into) : inflateBounded(body, into);
    if (filled === into.length && !hasChecksum(packed, adler32(into)))
      throw new Unpackable('another checksum');
    return filled;
  } catch (thrown) {
    // fflate throws its own errors with a text such as "invalid distance".
    if (thrown instanceof Unpackable) throw thrown;
    throw new Unpackable(thrown instanceof Error ? thrown.message : String(thrown));
  }
}

/** fflate neither grows an output it was given nor writes past it; the checksum tells what did not fit. */
function inflateQuick(body: Uint8Array, into: Uint8Array): number {
  return inflateSync(body, { out: into }).length;
}

function inflateBounded(body: Uint8Array, into: Uint8Array): number {
  let filled = 0;
  const inflate = new Inflate((chunk) => {
    const part = chunk.subarray(0, into.length - filled);
    into.set(part, filled);
    filled += part.length;
  });
  for (let at = 0; at < body.length && filled < into.length; at += pushedBytes) {
    inflate.push(body.subarray(at, at + pushedBytes), at + pushedBytes >= body.length);
  }
  return filled;
}

/** Writers may pad parts by a few bytes, so that the checksum is looked for in the last eight. */
function hasChecksum(packed: Uint8Array, wanted: number): boolean {
  const view = new DataView(packed.buffer, packed.byteOffset, packed.length);
  for (let at = packed.length - 4; at >= Math.max(2, packed.length - 8); at -= 1) {
    if (view.getUint32(at) === wanted) return true;
  }
  return false;
}

/** Adler-32 (RFC 1950, 8): sums modulo 65521, taken every 3800 bytes, before 32 bits overflow. */
function adler32(bytes: Uint8Array): number {
  let low = 1;
  let high = 0;
  for (let start = 0; start < bytes.length; start += 3800) {
    const end = Math.min(bytes.length, start + 3800);
    for (let i = start; i < end; i += 1) {
      low += bytes[i]!;
      high += low;
    }
    low %= 65521;
    high %= 65521;
  }
  return ((high << 16) | low) >>> 0;
}

/** PackBits (TIFF 6.0, section 9): n < 128, n + 1 bytes follow; n > 128, the next byte 257 - n times; 128 nothing. */
function unpackBits(packed: Uint8Array, into: Uint8Array): number {
  let filled = 0;
  for (let at = 0; at < packed.length && filled < into.length; ) {
    const control = packed[at]!;
    at += 1;
    if (control < 128) {
      const part = packed.subarray(at, at + Math.min(control + 1, into.length - filled));
      into.set(part, filled);
      filled += part.length;
      at += control + 1;
    } else if (control > 128 && at < packed.length) {
      const stop = Math.min(into.length, filled + 257 - control);
      into.fill(packed[at]!, filled, stop);
      filled = stop;
      at += 1;
    }
  }
  return filled;
}
