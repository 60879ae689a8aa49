import { useQueries, useQuery } from '@tanstack/react-query';
import { useMemo } from 'react';
import { Link, useParams } from 'react-router-dom';
import type { ResultRow } from '../../../shared/contracts/http';
import type { MapFile } from '../../../shared/contracts/result';
import { decodeMap } from '../../../shared/contracts/result-codec';
import { LoadedPage } from '../../components/page/LoadedPage';
import { Page } from '../../components/page/Page';
import { textLink } from '../../components/ui/link-class';
import { formatTime } from '../../lib/format-time';
import { useOwnGroup } from '../../lib/query/me';
import { resultQuery } from '../../lib/query/results';
import { studyName } from '../../lib/study-names';
import { mapQuery } from './api/result-maps';
import { ResultActions } from './components/ResultActions';
import { ResultBody } from './components/ResultBody';
import { toOutput } from './model/stored-output';

export function ResultPage() {
  const group = useOwnGroup();
  const { id = '' } = useParams();
  const result = useQuery(resultQuery(group.id, id));
  return (
    <LoadedPage
      query={result}
      what="the result"
      title="Result"
      otherwise={
        <Link to="/results" className={textLink}>
          All results
        </Link>
      }
    >
      {(row) => <OneResult row={row} />}
    </LoadedPage>
  );
}

/** Maps of a result as they arrive. */
function useMaps(row: ResultRow) {
  const entries = Object.entries(row.result.maps);
  return useQueries({
    queries: entries.map(([id, map]) => mapQuery(id, map)),
    combine: (queries) => {
      const files: Record<string, MapFile> = {};
      queries.forEach((query, i) => {
        if (query.data !== undefined) files[entries[i]![0]] = query.data;
      });
      return {
        files,
        waiting: queries.filter((query) => query.isPending).length,
        errors: queries.flatMap((query) => query.error ?? []),
      };
    },
  });
}

function OneResult({ row }: { row: ResultRow }) {
  const maps = useMaps(row);
  const decoded = useMemo(
    () => Object.fromEntries(Object.entries(maps.files).map(([id, map]) => [id, decodeMap(map)])),
    [maps.files],
  );
  const output = useMemo(() => toOutput(row.result, decoded), [row, decoded]);
  return (
    <Page
      title={row.name}
      heading={row.name}
      note={`${studyName(row.study)} · ${row.by} · ${formatTime(row.createdAt)}`}
      actions={
        <ResultActions row={row} maps={maps.waiting > 0 || maps.errors.length > 0 ? null : maps.files} />
      }
    >
      <ResultBody row={row} output={output} waiting={maps.waiting} errors={maps.errors} />
    </Page>
  );
}
