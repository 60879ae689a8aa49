import type { ArrayColumn } from '../../../shared/contracts/layout';
import { Problem } from '../../../shared/errors/problem';
import type { ArrayEntry } from './arrays';
import { mostRecordBytes, type StoredNumber, typeName } from './element-type';

const mostColumns = 16;

/** A column of numbers inside an array: element i starts at `start + i * stride`. */
export interface ColumnPlace extends StoredNumber {
  array: ArrayEntry;
  field: string | number | undefined;
  rows: number;
  start: number;
  stride: number;
}

/** "array" of an archive, or the file itself. */
export function arrayName({ name }: ArrayEntry): string {
  return name ?? 'the array';
}

/** Every column of numbers that could hold times or channels; none when the array cannot hold tags. */
export function columnsIn(array: ArrayEntry): ColumnPlace[] {
  const { type, shape, isFortran, dataStart } = array;
  const rows = shape[0] ?? 0;
  if (type.kind === 'other' || type.bytes > mostRecordBytes) return [];
  if (type.kind === 'fields') {
    if (shape.length !== 1) return [];
    return type.fields.flatMap(({ name, offset, stored }) =>
      stored === null || isHalf(stored)
        ? []
        : [{ array, field: name, rows, start: dataStart + offset, stride: type.bytes, ...stored }],
    );
  }
  const { stored, bytes } = type;
  if (isHalf(stored)) return [];
  if (shape.length === 1)
    return [{ array, field: undefined, rows, start: dataStart, stride: bytes, ...stored }];
  const columns = shape[1] ?? 0;
  if (shape.length !== 2 || columns < 2 || columns > mostColumns) return [];
  return Array.from({ length: columns }, (_, field) => ({
    array,
    field,
    rows,
    start: dataStart + field * bytes * (isFortran ? rows : 1),
    stride: isFortran ? bytes : columns * bytes,
    ...stored,
  }));
}

function isHalf({ number }: StoredNumber): boolean {
  return number.family === 'float' && number.bytes === 2;
}

/** The column a layout names. Throws `wrong-type` or `bad-layout`. */
export function placeColumn(array: ArrayEntry, { field }: ArrayColumn, role: string): ColumnPlace {
  const columns = columnsIn(array);
  const found = columns.find((column) => column.field === field);
  if (found) return found;
  const { type, shape, place } = array;
  const called = arrayName(array);
  if (type.kind !== 'other' && type.bytes > mostRecordBytes) {
    throw new Problem(
      'unsupported',
      `The records of ${called} take ${type.bytes} bytes each, more than ${mostRecordBytes}; save time and channel alone.`,
      place,
    );
  }
  const asked = field === undefined ? 'none named' : `"${field}"`;
  const isField = type.kind === 'fields' && type.fields.some(({ name }) => name === field);
  if (isField || (columns.length === 0 && type.kind !== 'fields')) {
    const what = isField ? `"${field}" of ` : '';
    throw new Problem(
      'wrong-type',
      `Expected whole numbers for the ${role}, found ${what}${typeName(type)} with shape ${shape.join(' x ') || 'of a single value'} in ${called}; point to an array of one dimension, to one of 2 to 16 columns, or to a field of integers.`,
      place,
    );
  }
  if (columns.length === 1 && columns[0]!.field === undefined) {
    throw new Problem(
      'bad-layout',
      `${called} has one column only, but the ${role} asks for ${asked}; leave the field out.`,
      place,
    );
  }
  const names = columns.map((column) => column.field).join(', ') || 'no numbers';
  throw new Problem(
    'bad-layout',
    `Expected a column of ${called} for the ${role}, found ${asked}; its columns are ${names}.`,
    place,
  );
}
