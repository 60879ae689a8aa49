import { useQuery } from '@tanstack/react-query';
import { LinkRow } from '../../../components/page/LinkRow';
import { Loaded } from '../../../components/page/Loaded';
import { Region } from '../../../components/page/Page';
import { formatAgo } from '../../../lib/format-time';
import { useOwnGroup } from '../../../lib/query/me';
import { sessionsQuery } from '../../../lib/query/sessions';
import { studyName } from '../../../lib/study-names';

const MOST = 8;

export function SessionRegion() {
  const group = useOwnGroup();
  const sessions = useQuery(sessionsQuery(group.id));
  const count = sessions.data?.length;
  return (
    <Region name="my sessions" note={count === undefined ? undefined : countNote(count)}>
      <Loaded query={sessions} what="your sessions">
        {(rows) =>
          rows.length === 0 ? (
            <p className="py-3 text-dim">
              None yet. Save the bench as a session, and its files, study and dials are here to go on with.
            </p>
          ) : (
            <ul aria-label="My sessions">
              {rows.slice(0, MOST).map((row) => (
                <LinkRow
                  key={row.id}
                  to={`/bench?session=${row.id}`}
                  name={row.name}
                  note={`${studyName(row.study)} · ${formatAgo(row.updatedAt, Date.now())}`}
                />
              ))}
            </ul>
          )
        }
      </Loaded>
    </Region>
  );
}

function countNote(count: number): string {
  return count > MOST ? `newest ${MOST} of ${count}` : String(count);
}
