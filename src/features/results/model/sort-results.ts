import type { ResultSummary } from '../../../../shared/contracts/http';
import { studyName } from '../../../lib/study-names';

export const sortKeys = ['name', 'study', 'by', 'when'] as const;
export type SortKey = (typeof sortKeys)[number];

export interface Sorting {
  key: SortKey;
  descending: boolean;
}

export interface Wanted {
  /** Words that must all be in the name, the maker or the study. */
  words: string;
  /** null: every study. */
  study: string | null;
}

function keyOf(row: ResultSummary, key: SortKey): string {
  if (key === 'when') return row.createdAt;
  if (key === 'study') return studyName(row.study);
  return key === 'by' ? row.by : row.name;
}

const collator = new Intl.Collator('en', { numeric: true, sensitivity: 'base' });

/** Rows that match, in order; equal ones stay newest first. */
export function arrangeResults(
  rows: readonly ResultSummary[],
  wanted: Wanted,
  { key, descending }: Sorting,
): ResultSummary[] {
  const words = wanted.words.toLowerCase().split(/\s+/).filter(Boolean);
  const matches = (row: ResultSummary): boolean => {
    const text = `${row.name} ${row.by} ${studyName(row.study)}`.toLowerCase();
    return (
      (wanted.study === null || row.study === wanted.study) && words.every((word) => text.includes(word))
    );
  };
  const sign = descending ? -1 : 1;
  return rows
    .filter(matches)
    .sort(
      (a, b) =>
        sign * collator.compare(keyOf(a, key), keyOf(b, key)) || b.createdAt.localeCompare(a.createdAt),
    );
}

/** A second click turns the order round; times start with the newest. */
export function nextSorting(current: Sorting, key: SortKey): Sorting {
  if (current.key === key) return { key, descending: !current.descending };
  return { key, descending: key === 'when' };
}
