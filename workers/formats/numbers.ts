import type { PixelArray } from '../../shared/contracts/blocks';
import { Problem } from '../../shared/errors/problem';

export interface NumberType {
  family: 'uint' | 'int' | 'float';
  bytes: number;
}

export function numberName({ family, bytes }: NumberType): string {
  return `${family}${8 * bytes}`;
}

/** Little-endian bytes as numbers of up to 32 bits or floats; 64-bit integers have no such view. */
export function viewNumbers(bytes: Uint8Array, { family, bytes: size }: NumberType): PixelArray {
  const aligned = bytes.byteOffset % size === 0 ? bytes : bytes.slice();
  const { buffer, byteOffset } = aligned;
  const count = aligned.length / size;
  if (family === 'float') {
    return size === 4
      ? new Float32Array(buffer, byteOffset, count)
      : new Float64Array(buffer, byteOffset, count);
  }
  if (size === 1) return family === 'int' ? new Int8Array(buffer, byteOffset, count) : aligned;
  if (size === 2) {
    return family === 'int'
      ? new Int16Array(buffer, byteOffset, count)
      : new Uint16Array(buffer, byteOffset, count);
  }
  return family === 'int'
    ? new Int32Array(buffer, byteOffset, count)
    : new Uint32Array(buffer, byteOffset, count);
}

/** IEEE half floats (1 sign, 5 exponent, 10 fraction bits) as floats, exactly. */
export function halfFloats(bytes: Uint8Array): Float32Array {
  const halves = viewNumbers(bytes, { family: 'uint', bytes: 2 });
  const values = new Float32Array(halves.length);
  for (let i = 0; i < halves.length; i += 1) {
    const half = halves[i]!;
    const exponent = (half >> 10) & 31;
    const fraction = half & 1023;
    const size =
      exponent === 0
        ? fraction * 2 ** -24
        : exponent === 31
          ? fraction === 0
            ? Number.POSITIVE_INFINITY
            : Number.NaN
          : (1024 + fraction) * 2 ** (exponent - 25);
    values[i] = half & 0x8000 ? -size : size;
  }
  return values;
}

/** Little-endian bytes as pixels: 64-bit integers and half floats become floats that hold them exactly. */
export function viewPixels(bytes: Uint8Array, number: NumberType, place: string): PixelArray {
  if (number.family === 'float') return number.bytes === 2 ? halfFloats(bytes) : viewNumbers(bytes, number);
  return number.bytes === 8 ? exactDoubles(bytes, number.family, place) : viewNumbers(bytes, number);
}

/** Pairs of words, least significant first: the exact and quick view of 64-bit integers. */
export function viewWordPairs(bytes: Uint8Array): Uint32Array {
  const aligned = bytes.byteOffset % 4 === 0 ? bytes : bytes.slice();
  return new Uint32Array(aligned.buffer, aligned.byteOffset, aligned.length / 4);
}

/** Doubles from 64-bit integers. Throws when one is at or past 2^53, because it would be rounded in silence. */
export function exactDoubles(bytes: Uint8Array, family: NumberType['family'], place: string): Float64Array {
  const words = viewWordPairs(bytes);
  const limit = 2 ** 21;
  const doubles = new Float64Array(words.length / 2);
  for (let i = 0; i < doubles.length; i += 1) {
    const high = family === 'int' ? words[2 * i + 1]! | 0 : words[2 * i + 1]!;
    if (!(high < limit && high >= -limit)) {
      throw new Problem(
        'wrong-type',
        `A 64-bit value passes 2^53 and cannot be kept exactly; save smaller values.`,
        place,
      );
    }
    doubles[i] = high * 2 ** 32 + words[2 * i]!;
  }
  return doubles;
}

/** Any numbers as doubles; 64-bit ones past 2^53 are rounded, which is enough to see whether a column rises. */
export function roundedDoubles(bytes: Uint8Array, number: NumberType): Float64Array {
  if (number.bytes < 8 || number.family === 'float') return new Float64Array(viewNumbers(bytes, number));
  const words = viewWordPairs(bytes);
  return Float64Array.from({ length: words.length / 2 }, (_, i) => {
    const high = words[2 * i + 1]!;
    return (number.family === 'int' ? high | 0 : high) * 2 ** 32 + words[2 * i]!;
  });
}
