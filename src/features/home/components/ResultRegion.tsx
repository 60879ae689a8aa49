import { useQuery } from '@tanstack/react-query';
import { Link } from 'react-router-dom';
import { Headline } from '../../../components/page/Headline';
import { LinkRow } from '../../../components/page/LinkRow';
import { Loaded } from '../../../components/page/Loaded';
import { Region } from '../../../components/page/Page';
import { textLink } from '../../../components/ui/link-class';
import { formatAgo } from '../../../lib/format-time';
import { mayUseBench, useOwnGroup } from '../../../lib/query/me';
import { resultsQuery } from '../../../lib/query/results';
import { studyName } from '../../../lib/study-names';

const MOST = 8;

export function ResultRegion() {
  const group = useOwnGroup();
  const results = useQuery(resultsQuery(group.id));
  return (
    <Region
      name="newest results"
      note={
        results.data === undefined || results.data.length === 0 ? undefined : (
          <Link to="/results" className={textLink}>
            all {results.data.length}
          </Link>
        )
      }
    >
      <Loaded query={results} what="the results">
        {(rows) =>
          rows.length === 0 ? (
            <p className="max-w-prose py-3 text-dim">
              None yet.{' '}
              {mayUseBench(group)
                ? 'When a study on the bench has finished, save what it found: the group reads it here, with its maps, checks and provenance.'
                : 'What the group saves from its bench is read here.'}
            </p>
          ) : (
            <ul aria-label="Newest results">
              {rows.slice(0, MOST).map((row) => (
                <LinkRow
                  key={row.id}
                  to={`/results/${row.id}`}
                  name={row.name}
                  note={`${studyName(row.study)} · ${row.by} · ${formatAgo(row.createdAt, Date.now())}`}
                >
                  <span className="text-text">
                    <Headline quantities={row.headline} />
                  </span>
                </LinkRow>
              ))}
            </ul>
          )
        }
      </Loaded>
    </Region>
  );
}
