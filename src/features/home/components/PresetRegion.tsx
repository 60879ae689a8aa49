import { useQuery } from '@tanstack/react-query';
import { Link } from 'react-router-dom';
import { LinkRow } from '../../../components/page/LinkRow';
import { Loaded } from '../../../components/page/Loaded';
import { Region } from '../../../components/page/Page';
import { textLink } from '../../../components/ui/link-class';
import { useOwnGroup } from '../../../lib/query/me';
import { presetsQuery } from '../../../lib/query/presets';
import { studyName } from '../../../lib/study-names';

const MOST = 6;

export function PresetRegion() {
  const group = useOwnGroup();
  const presets = useQuery(presetsQuery(group.id));
  return (
    <Region
      name="presets"
      note={
        presets.data === undefined || presets.data.length === 0 ? undefined : (
          <Link to="/presets" className={textLink}>
            all {presets.data.length}
          </Link>
        )
      }
    >
      <Loaded query={presets} what="the presets">
        {(rows) =>
          rows.length === 0 ? (
            <p className="py-3 text-dim">
              None yet. A preset keeps a study with its dials, so that next week’s run is analysed the same
              way: set the dials on the bench and save them.
            </p>
          ) : (
            <ul aria-label="Presets to open on the bench">
              {rows.slice(0, MOST).map((row) => (
                <LinkRow
                  key={row.id}
                  to={`/bench?preset=${row.id}`}
                  name={row.name}
                  note={`${studyName(row.study)} · v${row.version}`}
                />
              ))}
            </ul>
          )
        }
      </Loaded>
    </Region>
  );
}
