import type { Column } from '../../../../shared/contracts/layout';

/** One choice in the list of columns. */
export interface ColumnOption {
  value: string;
  label: string;
  hint: string;
  column: Column;
}

const INTEGER = /^u?int/;

/** Integer columns a person can point to: 1-D datasets, members of compounds, columns of narrow 2-D datasets. */
export function columnOptions(
  datasets: readonly { path: string; shape: number[]; type: string; fields: string[] }[],
): ColumnOption[] {
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
      return fields.map((field) => option({ dataset: path, field }, `${path} · ${field}`));
    if (!INTEGER.test(type)) return [];
    if (shape.length === 1) return [option({ dataset: path }, path)];
    if (shape.length === 2 && columns >= 2 && columns <= 16)
      return Array.from({ length: columns }, (_, field) =>
        option({ dataset: path, field }, `${path} · column ${field}`),
      );
    return [];
  });
}

export function frameOptions(datasets: readonly { path: string; shape: number[]; type: string }[]) {
  return datasets
    .filter(({ shape, type }) => shape.length === 3 && INTEGER.test(type))
    .map(({ path, shape, type }) => ({ value: path, label: path, hint: `${type} · ${shape.join(' × ')}` }));
}
