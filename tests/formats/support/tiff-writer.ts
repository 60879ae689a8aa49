/** A stack of uint16 frames, each directory before its pixels, with chosen gaps and room for lies. */
export interface TiffOptions {
  width: number;
  height: number;
  isBig: boolean;
  isLittle: boolean;
  /** Bytes left free before the directory of a page. */
  gap?: (page: number) => number;
  /** Changes the entries of a page: [tag, type, count, value], type 3 or 4 (16 in BigTIFF). */
  change?: (entries: Entry[], page: number) => Entry[];
  /** Changes the link to the next page. */
  link?: (next: number, page: number) => number;
}

export type Entry = [tag: number, type: number, count: number, value: number];

/** TIFF 6.0 and BigTIFF, one strip a page. */
export function writeTiff(frames: readonly Uint16Array[], options: TiffOptions): Uint8Array<ArrayBuffer> {
  const { width, height, isBig, isLittle, gap, change, link } = options;
  const head = isBig ? 16 : 8;
  const entryBytes = isBig ? 20 : 12;
  const directoryBytes = (entries: number): number => (isBig ? 16 : 6) + entries * entryBytes;
  const starts: number[] = [];
  let at = head;
  const changed = frames.map((_, page) => {
    at += gap?.(page) ?? 0;
    starts.push(at);
    const base: Entry[] = [
      [256, 4, 1, width],
      [257, 4, 1, height],
      [258, 3, 1, 16],
      [259, 3, 1, 1],
      [262, 3, 1, 1],
      [273, isBig ? 16 : 4, 1, 0],
      [277, 3, 1, 1],
      [278, 4, 1, height],
      [279, 4, 1, 2 * width * height],
    ];
    const entries = change?.(base, page) ?? base;
    // Untouched places of pixels follow the directory as it is now.
    for (const entry of entries)
      if (entry[0] === 273 && entry[3] === 0) entry[3] = at + directoryBytes(entries.length);
    at += directoryBytes(entries.length) + 2 * width * height;
    return entries;
  });
  const bytes = new Uint8Array(at);
  const view = new DataView(bytes.buffer);
  const word = (place: number, value: number): void =>
    isBig ? view.setBigUint64(place, BigInt(value), isLittle) : view.setUint32(place, value, isLittle);
  bytes.set(isLittle ? [0x49, 0x49] : [0x4d, 0x4d]);
  view.setUint16(2, isBig ? 43 : 42, isLittle);
  if (isBig) view.setUint16(4, 8, isLittle);
  word(isBig ? 8 : 4, starts[0] ?? 0);
  frames.forEach((frame, page) => {
    const entries = changed[page]!;
    let place = starts[page]!;
    if (isBig) view.setBigUint64(place, BigInt(entries.length), isLittle);
    else view.setUint16(place, entries.length, isLittle);
    place += isBig ? 8 : 2;
    for (const [tag, type, count, value] of entries) {
      view.setUint16(place, tag, isLittle);
      view.setUint16(place + 2, type, isLittle);
      word(place + 4, count);
      const valueAt = place + (isBig ? 12 : 8);
      if (type === 3 && count === 1) view.setUint16(valueAt, value, isLittle);
      else if (type === 4) view.setUint32(valueAt, value, isLittle);
      else word(valueAt, value);
      place += entryBytes;
    }
    const next = starts[page + 1] ?? 0;
    word(place, link?.(next, page) ?? next);
    place += isBig ? 8 : 4;
    for (const [k, pixel] of frame.entries()) view.setUint16(place + 2 * k, pixel, isLittle);
  });
  return bytes;
}
