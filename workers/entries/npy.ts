/**
 * NPY version 1.0 (NumPy Enhancement Proposal 1 and numpy.lib.format): little-endian float64, C order. Written here
 * because it is ten lines and readable everywhere.
 */
export function encodeNpy(shape: readonly number[], data: Float64Array): Uint8Array {
  const sizes = shape.length === 1 ? `${shape[0]},` : shape.join(', ');
  const text = `{'descr': '<f8', 'fortran_order': False, 'shape': (${sizes}), }`;
  // Magic (6), version (2) and length (2) with the header end on a multiple of 64, the last byte a line feed.
  const padded = `${text.padEnd(Math.ceil((text.length + 11) / 64) * 64 - 11)}\n`;
  const bytes = new Uint8Array(10 + padded.length + data.byteLength);
  bytes.set([0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59, 1, 0, padded.length & 255, padded.length >> 8]);
  bytes.set(new TextEncoder().encode(padded), 10);
  bytes.set(new Uint8Array(data.buffer, data.byteOffset, data.byteLength), 10 + padded.length);
  return bytes;
}
