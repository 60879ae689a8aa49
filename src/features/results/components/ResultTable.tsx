import { Link } from 'react-router-dom';
import type { ResultSummary } from '../../../../shared/contracts/http';
import { Headline } from '../../../components/page/Headline';
import { Table, Td, Th, Tr } from '../../../components/ui/Table';
import { formatTime } from '../../../lib/format-time';
import { studyName } from '../../../lib/study-names';
import type { Sorting, SortKey } from '../model/sort-results';

export interface ResultTableProps {
  rows: readonly ResultSummary[];
  sorting: Sorting;
  onSort(key: SortKey): void;
}

export function ResultTable({ rows, sorting, onSort }: ResultTableProps) {
  const head = { sorting, onSort };
  return (
    <>
      <Table label="Results of the group">
        <thead>
          <tr>
            <SortHead name="name" sortKey="name" {...head} />
            <SortHead name="study" sortKey="study" {...head} />
            <Th>headline</Th>
            <SortHead name="by" sortKey="by" {...head} />
            <SortHead name="when" sortKey="when" numeric {...head} />
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => (
            <Tr key={row.id} className="border-b border-line">
              <Td className="max-w-80 py-2">
                <Link to={`/results/${row.id}`} className="font-semibold hover:underline">
                  {row.name}
                </Link>
              </Td>
              <Td className="whitespace-nowrap">{studyName(row.study)}</Td>
              <Td>
                <Headline quantities={row.headline} />
              </Td>
              <Td className="whitespace-nowrap">{row.by}</Td>
              <Td numeric className="text-xs text-dim">
                <time dateTime={row.createdAt}>{formatTime(row.createdAt)}</time>
              </Td>
            </Tr>
          ))}
        </tbody>
      </Table>
      {rows.length === 0 ? (
        <p className="py-3 text-dim">No result matches. Take a word away, or choose every study.</p>
      ) : null}
    </>
  );
}

interface SortHeadProps {
  name: string;
  sortKey: SortKey;
  sorting: Sorting;
  onSort(key: SortKey): void;
  numeric?: boolean;
}

function SortHead({ name, sortKey, sorting, onSort, numeric }: SortHeadProps) {
  const active = sorting.key === sortKey;
  const direction = sorting.descending ? 'descending' : 'ascending';
  return (
    <Th numeric={numeric} aria-sort={active ? direction : 'none'}>
      <button type="button" onClick={() => onSort(sortKey)} className="py-0.5 hover:text-text">
        {name}
        <span aria-hidden="true" className="inline-block w-3 pl-1">
          {active ? (sorting.descending ? '↓' : '↑') : ''}
        </span>
      </button>
    </Th>
  );
}
