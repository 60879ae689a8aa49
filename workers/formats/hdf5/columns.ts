import type { Column } from '../../../shared/contracts/layout';
import { Problem } from '../../../shared/errors/problem';
import { gatherBytes, swapBytes } from '../gather';
import type { NumberType } from '../numbers';
import { absolutePath, type DatasetEntry, type Hdf5Tree, rowBytesOf, typeName } from './tree';

/** A column of integers inside the rows of a dataset. */
export interface ColumnPlace {
  dataset: DatasetEntry;
  rows: number;
  rowBytes: number;
  offset: number;
  number: NumberType;
  /** Most significant byte first. */
  isBig: boolean;
}

const mostColumns = 16;

/** The dataset at a path, or a Problem that names those that exist. */
export function findDataset(tree: Hdf5Tree, path: string, fileName: string): DatasetEntry {
  const wanted = absolutePath(path);
  const place = `${fileName}, ${wanted}`;
  const found = tree.datasets.find((dataset) => dataset.path === wanted);
  if (found?.refusal) throw new Problem('unsupported', `Dataset ${wanted} ${found.refusal}.`, place);
  if (found) return found;
  const link = tree.outside.find((each) => wanted === each.path || wanted.startsWith(`${each.path}/`));
  if (link) {
    throw new Problem(
      'unsupported',
      `${link.path} is a link into another file ("${link.fileName}"), which is not followed; open that file instead, or copy the dataset into this one.`,
      place,
    );
  }
  const names = tree.datasets.slice(0, 8).map((dataset) => dataset.path);
  const more = tree.datasets.length > names.length ? ` and ${tree.datasets.length - names.length} more` : '';
  const existing = names.length > 0 ? `it holds ${names.join(', ')}${more}` : 'it holds no datasets';
  throw new Problem(
    'missing-dataset',
    `There is no dataset ${wanted} in ${fileName}; ${existing}. Point to one of these.`,
    place,
  );
}

/** Where the column lies. Throws `missing-dataset`, `wrong-type`, `bad-layout` or `unsupported`. */
export function placeColumn(tree: Hdf5Tree, column: Column, role: string, fileName: string): ColumnPlace {
  const dataset = findDataset(tree, column.dataset, fileName);
  const element = elementOfColumn(dataset, column, role, `${fileName}, ${dataset.path}`);
  return { dataset, rows: dataset.shape[0]!, rowBytes: rowBytesOf(dataset), ...element };
}

function elementOfColumn(
  dataset: DatasetEntry,
  { field }: Column,
  role: string,
  place: string,
): { offset: number; number: NumberType; isBig: boolean } {
  const { shape, type, path } = dataset;
  const wrong = (found: string, wayOut: string): Problem =>
    new Problem(
      'wrong-type',
      `Expected whole numbers for the ${role}, found ${found} in ${path}; ${wayOut}.`,
      place,
    );
  if (type.kind === 'other') throw wrong(type.name, 'point to a dataset of integers');
  if (type.kind === 'compound') {
    const names = type.members.map(({ name }) => name).join(', ');
    if (shape.length !== 1) throw wrong(`rank ${shape.length}`, 'point to a dataset with one dimension');
    const member = type.members.find(({ name }) => name === field);
    if (!member) {
      throw new Problem(
        'bad-layout',
        `Expected a member of ${path} for the ${role}, found ${field === undefined ? 'none named' : `"${field}"`}; its members are ${names}.`,
        place,
      );
    }
    if (member.number === null || member.number.family === 'float') {
      throw wrong(`"${member.name}" of ${typeName(type)}`, 'point to a member of integers');
    }
    return { offset: member.offset, number: member.number, isBig: member.isBig };
  }
  if (type.number.family === 'float')
    throw wrong(typeName(type), 'save the times as whole ticks and channels as integers');
  if (shape.length === 1) {
    if (field === undefined) return { offset: 0, number: type.number, isBig: false };
    throw new Problem(
      'bad-layout',
      `${path} has one column only, but the ${role} asks for "${field}"; leave the field out.`,
      place,
    );
  }
  const columns = shape[1] ?? 0;
  if (shape.length !== 2 || columns < 2 || columns > mostColumns) {
    throw wrong(
      `shape ${shape.join(' x ') || 'of a single value'}`,
      'point to a dataset of one dimension, or of rows of 2 to 16 columns',
    );
  }
  if (typeof field === 'number' && field < columns)
    return { offset: field * type.bytes, number: type.number, isBig: false };
  throw new Problem(
    'bad-layout',
    `Expected a column from 0 to ${columns - 1} of ${path} for the ${role}, found ${field === undefined ? 'none' : `"${field}"`}; name one.`,
    place,
  );
}

/** The bytes of one column, packed and little-endian. Rows that are the column itself are answered as they are. */
export function gatherColumn(rows: Uint8Array, { rowBytes, offset, number, isBig }: ColumnPlace): Uint8Array {
  const { bytes } = number;
  if (rowBytes === bytes) return rows;
  const packed = gatherBytes(rows, offset, rowBytes, rows.length / rowBytes, bytes);
  return isBig ? swapBytes(packed, bytes) : packed;
}
