/// <reference path="./jsfive.d.ts" />
import type { Dataset } from 'jsfive';
import type { NumberType } from '../numbers';

/** What the header of a dataset proves jsfive reads exactly. */
export interface ProvenDataset {
  shape: number[];
  number: NumberType;
  chunkRows: number;
}

/** jsfive makes one array of doubles of a dataset: 32 MiB at most. */
const mostElements = 2 ** 22;
const undefinedAddress = 2n ** 64n - 1n;
/** Deflate, shuffle, Fletcher-32. */
const provenFilters: readonly unknown[] = [1, 2, 3];

/** Message types of HDF5 File Format Specification 3.0, IV.A.2. */
const messageType = { dataspace: 1, datatype: 3, externalFiles: 7, layout: 8, attributeInfo: 21 } as const;

/**
 * Null unless the object header holds only what jsfive is known to read exactly: header version 1, dataspace version 1,
 * integers of up to 32 bits that fill their bytes, IEEE floats, data contiguous or in chunks that are all there, and the
 * three filters it has. It reads other things too, but wrongly and in silence.
 */
export function proveDataset(dataset: Dataset, file: DataView): ProvenDataset | null {
  const { msgs, _header, filter_pipeline } = dataset._dataobjects;
  if (_header.get('version') !== 1) return null;
  const sharedFlag = 2;
  if (msgs.some((message) => (message.get('flags')! & sharedFlag) !== 0)) return null;
  const offsetOf = (type: number): number | undefined =>
    msgs.find((message) => message.get('type') === type)?.get('offset_to_message');
  if (offsetOf(messageType.externalFiles) !== undefined || offsetOf(messageType.attributeInfo) !== undefined)
    return null;
  const space = offsetOf(messageType.dataspace);
  const datatype = offsetOf(messageType.datatype);
  const layout = offsetOf(messageType.layout);
  if (space === undefined || datatype === undefined || layout === undefined) return null;
  const shape = proveShape(file, space);
  const number = proveNumber(file, datatype);
  if (shape === null || number === null) return null;
  if (filter_pipeline?.some((filter) => !provenFilters.includes(filter.get('filter_id')))) return null;
  const chunkRows = proveStorage(file, layout, shape, number.bytes, filter_pipeline !== null);
  return chunkRows === null ? null : { shape, number, chunkRows };
}

function proveShape(file: DataView, at: number): number[] | null {
  const rank = file.getUint8(at + 1);
  if (file.getUint8(at) !== 1 || rank === 0) return null;
  const shape = Array.from({ length: rank }, (_, k) => Number(file.getBigUint64(at + 8 + 8 * k, true)));
  const elements = shape.reduce((product, size) => product * size, 1);
  return elements > 0 && elements <= mostElements ? shape : null;
}

/** Datatype message, IV.A.2.d: class, bit field, size, bit offset, precision, then the layout of floats. */
function proveNumber(file: DataView, at: number): NumberType | null {
  const family = file.getUint8(at) & 15;
  const bits = file.getUint8(at + 1);
  const bytes = file.getUint32(at + 4, true);
  const isWhole = file.getUint16(at + 8, true) === 0 && file.getUint16(at + 10, true) === 8 * bytes;
  if (!isWhole) return null;
  if (family === 0) {
    if (bytes !== 1 && bytes !== 2 && bytes !== 4) return null;
    return { family: (bits & 8) !== 0 ? 'int' : 'uint', bytes };
  }
  const vaxOrder = 64;
  if (family !== 1 || (bits & vaxOrder) !== 0) return null;
  const parts = [12, 13, 14, 15].map((part) => file.getUint8(at + part));
  const bias = file.getUint32(at + 16, true);
  const isSingle = bytes === 4 && bias === 127 && String(parts) === '23,8,0,23';
  const isDouble = bytes === 8 && bias === 1023 && String(parts) === '52,11,0,52';
  return isSingle || isDouble ? { family: 'float', bytes } : null;
}

/** Rows of a chunk (1 when contiguous), or null unless every byte of the dataset is stored in this file. */
function proveStorage(
  file: DataView,
  at: number,
  shape: readonly number[],
  elementBytes: number,
  isFiltered: boolean,
): number | null {
  const version = file.getUint8(at);
  const storage = file.getUint8(at + 1);
  if (version !== 3) return null;
  const elements = shape.reduce((product, size) => product * size, 1);
  if (storage === 1) {
    const address = file.getBigUint64(at + 2, true);
    const isInside =
      address !== undefinedAddress && Number(address) + elements * elementBytes <= file.byteLength;
    return isInside && !isFiltered ? 1 : null;
  }
  if (storage !== 2) return null;
  const address = file.getBigUint64(at + 3, true);
  const rank = file.getUint8(at + 2) - 1;
  if (address === undefinedAddress || rank !== shape.length) return null;
  const chunk = shape.map((_, k) => file.getUint32(at + 11 + 4 * k, true));
  const expected = shape.reduce((product, size, k) => product * Math.ceil(size / chunk[k]!), 1);
  return countChunks(file, Number(address), rank + 1) === expected ? chunk[0]! : null;
}

/** Chunks named by a version 1 B-tree (III.A.1). A node: 24 bytes, then key and child address by turns. */
function countChunks(file: DataView, node: number, dimensions: number): number {
  const level = file.getUint8(node + 5);
  const entries = file.getUint16(node + 6, true);
  if (level === 0) return entries;
  const keyBytes = 8 + 8 * dimensions;
  let chunks = 0;
  for (let k = 0; k < entries; k += 1) {
    const child = file.getBigUint64(node + 24 + k * (keyBytes + 8) + keyBytes, true);
    chunks += countChunks(file, Number(child), dimensions);
  }
  return chunks;
}
