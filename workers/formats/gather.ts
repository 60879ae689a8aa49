/**
 * Values of `bytes` bytes each, the first at `offset`, `stride` bytes apart, packed. Copied in the largest units that
 * all places are multiples of, up to words: floats would not keep every pattern of bits.
 */
export function gatherBytes(
  rows: Uint8Array,
  offset: number,
  stride: number,
  count: number,
  bytes: number,
): Uint8Array {
  const packed = new Uint8Array(count * bytes);
  const isMultipleOf = (unit: number): boolean =>
    [rows.byteOffset + offset, stride, bytes].every((place) => place % unit === 0);
  if (count === 0) return packed;
  const start = rows.byteOffset + offset;
  const span = (count - 1) * stride + bytes;
  if (isMultipleOf(4)) {
    copyWords(
      new Uint32Array(rows.buffer, start, span / 4),
      new Uint32Array(packed.buffer),
      stride / 4,
      bytes / 4,
    );
  } else if (isMultipleOf(2)) {
    copyHalves(
      new Uint16Array(rows.buffer, start, span / 2),
      new Uint16Array(packed.buffer),
      stride / 2,
      bytes / 2,
    );
  } else {
    copyBytes(rows.subarray(offset, offset + span), packed, stride, bytes);
  }
  return packed;
}

// The same loop for each type: one loop for all would be slow for all.
function copyWords(from: Uint32Array, to: Uint32Array, stride: number, width: number): void {
  for (let unit = 0; unit < width; unit += 1) {
    for (let f = unit, t = unit; t < to.length; f += stride, t += width) to[t] = from[f]!;
  }
}

function copyHalves(from: Uint16Array, to: Uint16Array, stride: number, width: number): void {
  for (let unit = 0; unit < width; unit += 1) {
    for (let f = unit, t = unit; t < to.length; f += stride, t += width) to[t] = from[f]!;
  }
}

function copyBytes(from: Uint8Array, to: Uint8Array, stride: number, width: number): void {
  for (let unit = 0; unit < width; unit += 1) {
    for (let f = unit, t = unit; t < to.length; f += stride, t += width) to[t] = from[f]!;
  }
}

/** The other byte order, in place: `bytes` is 1, 2, 4 or 8. The memory must be the caller's own. */
export function swapBytes(packed: Uint8Array, bytes: number): Uint8Array {
  if (bytes === 1) return packed;
  const own = packed.byteOffset % bytes === 0 ? packed : packed.slice();
  if (bytes === 2) {
    const halves = new Uint16Array(own.buffer, own.byteOffset, own.length / 2);
    for (let i = 0; i < halves.length; i += 1) halves[i] = (halves[i]! << 8) | (halves[i]! >>> 8);
    return own;
  }
  const words = new Uint32Array(own.buffer, own.byteOffset, own.length / 4);
  for (let i = 0; i < words.length; i += 1) {
    const turned = (words[i]! << 16) | (words[i]! >>> 16);
    words[i] = ((turned & 0x00ff00ff) << 8) | ((turned >>> 8) & 0x00ff00ff);
  }
  if (bytes === 8) {
    for (let i = 0; i < words.length; i += 2) {
      const low = words[i]!;
      words[i] = words[i + 1]!;
      words[i + 1] = low;
    }
  }
  return own;
}
