import { useQuery } from '@tanstack/react-query';
import { useState } from 'react';
import { Link, useSearchParams } from 'react-router-dom';
import type { ResultSummary } from '../../../shared/contracts/http';
import { LoadedPage } from '../../components/page/LoadedPage';
import { Page } from '../../components/page/Page';
import { TextInput } from '../../components/ui/Field';
import { textLink } from '../../components/ui/link-class';
import { Select } from '../../components/ui/Select';
import { mayUseBench, useOwnGroup } from '../../lib/query/me';
import { resultsQuery } from '../../lib/query/results';
import { studyName } from '../../lib/study-names';
import { ResultTable } from './components/ResultTable';
import { arrangeResults, nextSorting, type Sorting } from './model/sort-results';

const ALL = 'all';

/** Everything the group has saved. The filters are in the address, so a filtered list can be sent on. */
export function ResultsPage() {
  const group = useOwnGroup();
  const results = useQuery(resultsQuery(group.id));
  return (
    <LoadedPage query={results} what="the results" title="Results">
      {(rows) => <ResultList rows={rows} />}
    </LoadedPage>
  );
}

function ResultList({ rows }: { rows: ResultSummary[] }) {
  const [search, setSearch] = useSearchParams();
  const [sorting, setSorting] = useState<Sorting>({ key: 'when', descending: true });
  const words = search.get('words') ?? '';
  const study = search.get('study');
  const studies = [...new Set(rows.map((row) => row.study))];
  const found = arrangeResults(rows, { words, study }, sorting);
  const want = (name: string, value: string): void =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (value === '') next.delete(name);
        else next.set(name, value);
        return next;
      },
      { replace: true },
    );
  const filters =
    rows.length === 0 ? null : (
      <search className="flex flex-wrap items-center gap-4">
        <TextInput
          type="search"
          aria-label="Words in the name, maker or study"
          placeholder="words"
          value={words}
          onChange={(event) => want('words', event.target.value)}
          className="w-56"
        />
        <Select
          aria-label="Study"
          value={study ?? ALL}
          onValueChange={(value) => want('study', value === ALL ? '' : value)}
          options={[
            { value: ALL, label: 'every study' },
            ...studies.map((id) => ({ value: id, label: studyName(id) })),
          ]}
        />
      </search>
    );
  return (
    <Page
      title="Results"
      heading="Results"
      note={found.length === rows.length ? String(rows.length) : `${found.length} of ${rows.length}`}
      actions={filters}
    >
      <div className="relative overflow-x-auto px-5 py-3">
        {rows.length === 0 ? (
          <NoResults />
        ) : (
          <ResultTable
            rows={found}
            sorting={sorting}
            onSort={(key) => setSorting(nextSorting(sorting, key))}
          />
        )}
      </div>
    </Page>
  );
}

function NoResults() {
  const group = useOwnGroup();
  return (
    <p className="max-w-prose py-3 text-dim">
      Nobody in {group.name} has saved a result yet.{' '}
      {mayUseBench(group) ? (
        <>
          Open a file or a sample on the{' '}
          <Link to="/bench" className={textLink}>
            bench
          </Link>
          , and save what the study finds.
        </>
      ) : (
        'What the group saves from its bench is read here.'
      )}
    </p>
  );
}
