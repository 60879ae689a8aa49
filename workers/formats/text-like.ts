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
