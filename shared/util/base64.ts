/** Base64 of raw bytes (RFC 4648), without DOM or Node so that every room can use it. */

const alphabet = 'ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/';
const sextets = new Int16Array(128).fill(-1);
for (let i = 0; i < 64; i++) sextets[alphabet.charCodeAt(i)] = i;

export function encodeBase64(bytes: Uint8Array): string {
  const parts: string[] = [];
  const whole = bytes.length - (bytes.length % 3);
  let text = '';
  for (let i = 0; i < whole; i += 3) {
    const word = (bytes[i]! << 16) | (bytes[i + 1]! << 8) | bytes[i + 2]!;
    text +=
      alphabet[word >>> 18]! +
      alphabet[(word >>> 12) & 63]! +
      alphabet[(word >>> 6) & 63]! +
      alphabet[word & 63]!;
    if (text.length > 8192) {
      parts.push(text);
      text = '';
    }
  }
  const rest = bytes.length - whole;
  if (rest === 1) {
    const word = bytes[whole]!;
    text += `${alphabet[word >>> 2]}${alphabet[(word & 3) << 4]}==`;
  } else if (rest === 2) {
    const word = (bytes[whole]! << 8) | bytes[whole + 1]!;
    text += `${alphabet[word >>> 10]}${alphabet[(word >>> 4) & 63]}${alphabet[(word & 15) << 2]}=`;
  }
  parts.push(text);
  return parts.join('');
}

/** Throws RangeError on a character outside the alphabet or a length that cannot be base64. */
export function decodeBase64(text: string): Uint8Array<ArrayBuffer> {
  const padding = text.endsWith('==') ? 2 : text.endsWith('=') ? 1 : 0;
  if (text.length % 4 !== 0) throw new RangeError(`Base64 of length ${text.length} is cut short.`);
  const bytes = new Uint8Array((text.length / 4) * 3 - padding);
  let out = 0;
  for (let i = 0; i < text.length; i += 4) {
    let word = 0;
    for (let k = 0; k < 4; k++) {
      const code = text.charCodeAt(i + k);
      const value = code === 61 && i + k >= text.length - padding ? 0 : code < 128 ? sextets[code]! : -1;
      if (value < 0) throw new RangeError(`Not base64 at character ${i + k}.`);
      word = (word << 6) | value;
    }
    if (out < bytes.length) bytes[out++] = word >>> 16;
    if (out < bytes.length) bytes[out++] = (word >>> 8) & 255;
    if (out < bytes.length) bytes[out++] = word & 255;
  }
  return bytes;
}
