/** Control bytes that never occur in text: all below 32 except tab, line feed, form feed, carriage return and escape. */
function isControl(byte: number): boolean {
  return byte < 32 && byte !== 9 && byte !== 10 && byte !== 12 && byte !== 13 && byte !== 27;
}

/**
 * True when the bytes read as text: valid UTF-8 (a character cut at the end is allowed) without control characters.
 * Binary tags nearly always hold zero bytes or other control bytes within the first hundred.
 */
export function isTextLike(head: Uint8Array): boolean {
  const sample = head.subarray(0, 4096);
  if (sample.length === 0 || sample.some(isControl)) return false;
  try {
    new TextDecoder('utf-8', { fatal: true }).decode(sample, { stream: true });
    return true;
  } catch (thrown) {
    if (thrown instanceof TypeError) return false;
    throw thrown;
  }
}

/** True for the byte-order mark of UTF-16 before Latin letters and digits, which leave every second byte zero. */
export function isUtf16(head: Uint8Array): boolean {
  const first = head[0]! * 256 + head[1]!;
  if (first !== 0xfffe && first !== 0xfeff) return false;
  const high = first === 0xfffe ? 1 : 0;
  let zeros = 0;
  const end = Math.min(head.length, 66);
  for (let i = 2 + high; i < end; i += 2) if (head[i] === 0) zeros += 1;
  return zeros >= Math.floor((end - 2) / 2) * 0.9;
}
