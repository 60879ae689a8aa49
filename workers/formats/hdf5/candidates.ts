import { Problem } from '../../../shared/errors/problem';
import { type ColumnScores, scoreColumn } from '../column-scores';
import { type NumberType, roundedDoubles } from '../numbers';
import { type ColumnPlace, gatherColumn } from './columns';
import { type DatasetEntry, type Hdf5Tree, rowBytesOf } from './tree';

/** A column of integers that may be time or channel. */
export interface Candidate extends ColumnPlace, ColumnScores {
  field: string | number | undefined;
}

const mostCandidates = 200;
const sampledRows = 4096;

/**
 * Every column of integers of every dataset that could hold tags, judged by its first rows and, weakly, its name.
 * Datasets that cannot be read are told in `warnings`: another one may still be what is looked for.
 */
export function candidatesOf(tree: Hdf5Tree): { candidates: Candidate[]; warnings: string[] } {
  const candidates: Candidate[] = [];
  const warnings: string[] = [];
  for (const dataset of tree.datasets) {
    if (candidates.length >= mostCandidates) break;
    const columns = dataset.refusal === null ? columnsIn(dataset) : [];
    const rows = dataset.shape[0] ?? 0;
    if (columns.length === 0 || rows === 0) continue;
    const sample = readSample(tree, dataset, Math.min(rows, sampledRows), warnings);
    if (sample === null) continue;
    for (const { field, offset, number, isBig } of columns) {
      const place: ColumnPlace = { dataset, rows, rowBytes: rowBytesOf(dataset), offset, number, isBig };
      const values = roundedDoubles(gatherColumn(sample, place), number);
      const name = typeof field === 'string' ? field : dataset.path.slice(dataset.path.lastIndexOf('/') + 1);
      candidates.push({ ...place, field, ...scoreColumn(values, number.bytes, name) });
    }
  }
  return { candidates, warnings };
}

function readSample(
  tree: Hdf5Tree,
  dataset: DatasetEntry,
  rows: number,
  warnings: string[],
): Uint8Array | null {
  try {
    return tree.readRows(dataset, 0, rows);
  } catch (thrown) {
    if (!(thrown instanceof Problem)) throw thrown;
    warnings.push(thrown.message);
    return null;
  }
}

function columnsIn({
  shape,
  type,
}: DatasetEntry): { field?: string | number; offset: number; number: NumberType; isBig: boolean }[] {
  if (type.kind === 'other') return [];
  if (type.kind === 'compound') {
    if (shape.length !== 1) return [];
    return type.members.flatMap(({ name, offset, number, isBig }) =>
      number !== null && number.family !== 'float' ? [{ field: name, offset, number, isBig }] : [],
    );
  }
  const { number, bytes } = type;
  if (number.family === 'float') return [];
  if (shape.length === 1) return [{ offset: 0, number, isBig: false }];
  const columns = shape[1] ?? 0;
  if (shape.length !== 2 || columns < 2 || columns > 16) return [];
  return Array.from({ length: columns }, (_, field) => ({
    field,
    offset: field * bytes,
    number,
    isBig: false,
  }));
}
