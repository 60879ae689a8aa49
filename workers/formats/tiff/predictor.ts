import { swapBytes } from '../gather';
import type { Geometry } from './geometry';

/** Turns the unpacked rows of a part into little-endian samples, in place where that can be. */
export function settleSamples(
  rows: Uint8Array,
  { number, isLittle, predictor }: Geometry,
  rowSamples: number,
): Uint8Array {
  // Predictor 3 orders bytes by itself, whatever the order of the file.
  if (predictor === 3) return joinFloatBytes(rows, number.bytes, rowSamples);
  const samples = isLittle ? rows : swapBytes(rows, number.bytes);
  if (predictor === 2) addNeighbours(samples, number.bytes, rowSamples);
  return samples;
}

/** Horizontal differencing (TIFF 6.0, section 14): each sample was stored as the difference to the one on its left. */
function addNeighbours(samples: Uint8Array, bytes: number, rowSamples: number): void {
  const { buffer, byteOffset } = samples;
  const count = samples.length / bytes;
  if (bytes === 1) addRows8(samples, rowSamples);
  else if (bytes === 2) addRows16(new Uint16Array(buffer, byteOffset, count), rowSamples);
  else if (bytes === 4) addRows32(new Uint32Array(buffer, byteOffset, count), rowSamples);
  else addRows64(new BigUint64Array(buffer, byteOffset, count), rowSamples);
}

// The same loop for each type: one loop for all would be slow for all.
function addRows8(samples: Uint8Array, row: number): void {
  for (let start = 0; start < samples.length; start += row) {
    for (let i = start + 1; i < start + row; i += 1) samples[i] = samples[i]! + samples[i - 1]!;
  }
}

function addRows16(samples: Uint16Array, row: number): void {
  for (let start = 0; start < samples.length; start += row) {
    for (let i = start + 1; i < start + row; i += 1) samples[i] = samples[i]! + samples[i - 1]!;
  }
}

function addRows32(samples: Uint32Array, row: number): void {
  for (let start = 0; start < samples.length; start += row) {
    for (let i = start + 1; i < start + row; i += 1) samples[i] = samples[i]! + samples[i - 1]!;
  }
}

function addRows64(samples: BigUint64Array, row: number): void {
  for (let start = 0; start < samples.length; start += row) {
    for (let i = start + 1; i < start + row; i += 1) samples[i] = samples[i]! + samples[i - 1]!;
  }
}

/**
 * Floating point predictor (Adobe Photoshop TIFF Technical Note 3, 2005): the most significant bytes of a row of floats
 * come first, then the next ones, each stored as the difference to the byte before.
 */
function joinFloatBytes(rows: Uint8Array, bytes: number, rowSamples: number): Uint8Array {
  const rowBytes = rowSamples * bytes;
  const joined = new Uint8Array(rows.length);
  for (let start = 0; start < rows.length; start += rowBytes) {
    for (let i = start + 1; i < start + rowBytes; i += 1) rows[i] = rows[i]! + rows[i - 1]!;
    for (let byte = 0; byte < bytes; byte += 1) {
      let f = start + (bytes - 1 - byte) * rowSamples;
      for (let t = start + byte; t < start + rowBytes; t += bytes, f += 1) joined[t] = rows[f]!;
    }
  }
  return joined;
}
