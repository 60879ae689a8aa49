import type { DatasetFact } from '../../../../shared/contracts/engine';
import type { ArrayColumn, Column } from '../../../../shared/contracts/layout';

/** One choice in the list of columns. */
export interface ColumnOption {
  value: string;
  label: string;
  hint: string;
  column: Column;
}

const INTEGER = /^u?int/;
const PIXEL = /^(u?int|float(32|64))/;

/** The one array of a NumPy file has no name. */
const nameOf = (path: string): string => (path === '' ? 'the array' : path);

/**
 * Integer columns a person can point to: 1-D datasets, members of compounds, columns of narrow 2-D datasets; and the same
 * of NumPy arrays.
 */
export function columnOptions(datasets: readonly DatasetFact[]): ColumnOption[] {
  return datasets.flatMap(({ path, shape, type, fields }): ColumnOption[] => {
    const [rows = 0, columns = 0] = shape;
    const hint = `${type} · ${shape.join(' × ')}`;
    const option = (column: Column, label: string): ColumnOption => ({
      value: JSON.stringify([column.dataset, column.field ?? null]),
      label,
      hint,
      column,
    });
    if (rows === 0) return [];
    if (fields.length > 0 && shape.length === 1)
      return fields.map((field) => option({ dataset: path, field }, `${nameOf(path)} · ${field}`));
    if (!INTEGER.test(type)) return [];
    if (shape.length === 1) return [option({ dataset: path }, nameOf(path))];
    if (shape.length === 2 && columns >= 2 && columns <= 16)
      return Array.from({ length: columns }, (_, field) =>
        option({ dataset: path, field }, `${nameOf(path)} · column ${field}`),
      );
    return [];
  });
}

/** The same place in the words of a NumPy layout. */
export function toArrayColumn({ dataset, field }: Column): ArrayColumn {
  return {
    ...(dataset === '' ? {} : { array: dataset }),
    ...(field === undefined ? {} : { field }),
  };
}

/** Stacks a person can point to. */
export function frameOptions(datasets: readonly Pick<DatasetFact, 'path' | 'shape' | 'type'>[]) {
  return datasets
    .filter(({ shape, type }) => shape.length === 3 && PIXEL.test(type))
    .map(({ path, shape, type }) => ({
      value: JSON.stringify(path),
      path,
      label: nameOf(path),
      hint: `${type} · ${shape.join(' × ')}`,
    }));
}
