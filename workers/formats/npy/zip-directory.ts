import type { ByteSource } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';

/** A member of a ZIP archive as the central directory tells it (APPNOTE.TXT 6.3.10 of PKWARE, 4.3.12). */
export interface ZipEntry {
  name: string;
  /** 0 stored, 8 deflated; others are not read. */
  method: number;
  isEncrypted: boolean;
  packedBytes: number;
  /** As the directory says; not to be believed before the bytes are there. */
  bytes: number;
  crc: number;
  /** Where its local header lies in the file. */
  at: number;
}

const signatures = {
  local: 0x04034b50,
  central: 0x02014b50,
  end: 0x06054b50,
  end64: 0x06064b50,
  locator64: 0x07064b50,
};
const endBytes = 22;
const locatorBytes = 20;
const end64Bytes = 56;
const mostComment = 65535;
/** About a quarter of a million members. */
const mostDirectoryBytes = 2 ** 24;

/** Members in the order of the directory; of two with one name the last counts. Throws `truncated` or `unreadable`. */
export async function readZipDirectory(source: ByteSource): Promise<ZipEntry[]> {
  const { size, name } = source;
  const tailStart = Math.max(0, size - endBytes - mostComment - locatorBytes);
  const tail = viewOf(await source.read(tailStart, size));
  const found = findEnd(tail);
  if (found < 0) {
    throw new Problem(
      'truncated',
      `Expected the directory of the archive at the end of ${name}, found none; it was cut short, copy or save it again.`,
      `${name}, byte ${size}`,
    );
  }
  const end = await placeDirectory(source, tail, found, tailStart);
  // Bytes before the archive shift everything it says about places.
  const shift = end.at - end.bytes - end.start;
  if (shift < 0 || end.bytes > mostDirectoryBytes) {
    throw damaged(name, end.at, `a directory of ${end.bytes} bytes at byte ${end.start}`);
  }
  const start = end.start + shift;
  const directory = viewOf(await source.read(start, start + end.bytes));
  return parseDirectory(directory, name, start, shift);
}

function viewOf(bytes: Uint8Array): DataView {
  return new DataView(bytes.buffer, bytes.byteOffset, bytes.length);
}

function findEnd(tail: DataView): number {
  for (let at = tail.byteLength - endBytes; at >= 0; at -= 1) {
    if (tail.getUint32(at, true) !== signatures.end) continue;
    if (at + endBytes + tail.getUint16(at + 20, true) === tail.byteLength) return at;
  }
  return -1;
}

/** Where the directory is said to start, how long it is, and where it ends in truth. */
async function placeDirectory(
  source: ByteSource,
  tail: DataView,
  at: number,
  tailStart: number,
): Promise<{ start: number; bytes: number; at: number }> {
  const locator = at - locatorBytes;
  const has64 = locator >= 0 && tail.getUint32(locator, true) === signatures.locator64;
  if (!has64) {
    return {
      start: tail.getUint32(at + 16, true),
      bytes: tail.getUint32(at + 12, true),
      at: tailStart + at,
    };
  }
  // Just before the locator, unless it has extensions nobody writes; bytes before the archive make the locator's own word wrong.
  const at64 = tailStart + locator - end64Bytes;
  const end64 = viewOf(await source.read(Math.max(0, at64), at64 + end64Bytes));
  if (at64 < 0 || end64.byteLength < end64Bytes || end64.getUint32(0, true) !== signatures.end64) {
    throw damaged(source.name, tailStart + locator, 'no ZIP64 record before its locator');
  }
  return { start: safe64(end64, 48), bytes: safe64(end64, 40), at: at64 };
}

function parseDirectory(view: DataView, name: string, start: number, shift: number): ZipEntry[] {
  const entries = new Map<string, ZipEntry>();
  for (let at = 0; at < view.byteLength; ) {
    const isWhole = at + 46 <= view.byteLength && view.getUint32(at, true) === signatures.central;
    const nameBytes = isWhole ? view.getUint16(at + 28, true) : 0;
    const extraBytes = isWhole ? view.getUint16(at + 30, true) : 0;
    const next = at + 46 + nameBytes + extraBytes + (isWhole ? view.getUint16(at + 32, true) : 0);
    if (!isWhole || next > view.byteLength)
      throw damaged(name, start + at, 'no whole entry of the directory');
    const flags = view.getUint16(at + 8, true);
    const bytesOfName = new Uint8Array(view.buffer, view.byteOffset + at + 46, nameBytes);
    const isUtf8 = (flags & 0x800) !== 0;
    const entry: ZipEntry = {
      name: new TextDecoder(isUtf8 ? 'utf-8' : 'latin1').decode(bytesOfName),
      method: view.getUint16(at + 10, true),
      isEncrypted: (flags & 1) !== 0,
      crc: view.getUint32(at + 16, true),
      packedBytes: view.getUint32(at + 20, true),
      bytes: view.getUint32(at + 24, true),
      at: view.getUint32(at + 42, true),
    };
    readExtra64(view, at + 46 + nameBytes, extraBytes, entry);
    entry.at += shift;
    entries.set(entry.name, entry);
    at = next;
  }
  return [...entries.values()];
}

/** ZIP64 extended information (4.5.3): only the values that do not fit 32 bits, in this order. */
function readExtra64(view: DataView, start: number, bytes: number, entry: ZipEntry): void {
  const end = start + bytes;
  for (let at = start; at + 4 <= end; ) {
    const size = view.getUint16(at + 2, true);
    if (view.getUint16(at, true) === 1 && at + 4 + size <= end) {
      let value = at + 4;
      for (const key of ['bytes', 'packedBytes', 'at'] as const) {
        if (entry[key] !== 0xffffffff || value + 8 > at + 4 + size) continue;
        entry[key] = safe64(view, value);
        value += 8;
      }
    }
    at += 4 + size;
  }
}

/** Past 2^53 no file reaches, so that rounding does not matter. */
function safe64(view: DataView, at: number): number {
  return Number(view.getBigUint64(at, true));
}

/** Where the bytes of a member start. The local header repeats the name and may have other extra fields. */
export async function findEntryData(source: ByteSource, entry: ZipEntry): Promise<number> {
  const local = viewOf(await source.read(entry.at, entry.at + 30));
  if (local.byteLength < 30 || local.getUint32(0, true) !== signatures.local) {
    throw damaged(source.name, entry.at, `no header of "${entry.name}"`);
  }
  const start = entry.at + 30 + local.getUint16(26, true) + local.getUint16(28, true);
  if (start + entry.packedBytes <= source.size) return start;
  throw new Problem(
    'truncated',
    `Expected ${entry.packedBytes} bytes of "${entry.name}" from byte ${start} of ${source.name}, found ${Math.max(0, source.size - start)}; copy or save it again.`,
    `${source.name}, byte ${source.size}`,
  );
}

function damaged(name: string, at: number, found: string): Problem {
  return new Problem(
    'unreadable',
    `Expected a whole ZIP archive in ${name}, found ${found}; it is damaged, copy or save it again.`,
    `${name}, byte ${at}`,
  );
}
