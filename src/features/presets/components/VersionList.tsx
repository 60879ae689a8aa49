import { useQuery } from '@tanstack/react-query';
import { Link } from 'react-router-dom';
import type { PresetRow } from '../../../../shared/contracts/http';
import { Loaded } from '../../../components/page/Loaded';
import { textLink } from '../../../components/ui/link-class';
import { useOwnGroup } from '../../../lib/query/me';
import { presetQuery } from '../../../lib/query/presets';
import { studiesQuery } from '../../../lib/query/studies';
import { listDifferences } from '../model/differences';

export interface VersionListProps {
  row: PresetRow;
  newest: number;
}

/** Versions are numbered and stay as they are; the one shown says what it changed. */
export function VersionList({ row, newest }: VersionListProps) {
  const versions = Array.from({ length: newest }, (_, i) => newest - i);
  return (
    <>
      <ul aria-label="Versions" className="flex flex-wrap gap-x-4 gap-y-1 pt-2 font-mono">
        {versions.map((version) => (
          <li key={version}>
            {version === row.version ? (
              <span aria-current="true" className="border-b-2 border-text">
                v{version}
              </span>
            ) : (
              <Link to={version === newest ? '?' : `?version=${version}`} className={textLink}>
                v{version}
              </Link>
            )}
          </li>
        ))}
      </ul>
      {row.version > 1 ? <Changes row={row} /> : null}
    </>
  );
}

function Changes({ row }: { row: PresetRow }) {
  const group = useOwnGroup();
  const before = useQuery(presetQuery(group.id, row.id, row.version - 1));
  const specs = useQuery(studiesQuery).data?.find((info) => info.id === row.study)?.dials ?? [];
  return (
    <Loaded query={before} what="the version before">
      {(previous) => {
        const differences = listDifferences(previous.preset, row.preset, specs);
        return (
          <div className="mt-3">
            <h3 className="text-dim">
              v{row.version} against v{previous.version}
              {differences.length === 0 ? ': no difference' : ''}
            </h3>
            <ul>
              {differences.map(({ what, before: was, after }) => (
                <li key={what} className="border-b border-line py-1 last:border-b-0">
                  {what}{' '}
                  <span className="font-mono text-xs">
                    <span className="text-dim">{was}</span> → {after}
                  </span>
                </li>
              ))}
            </ul>
          </div>
        );
      }}
    </Loaded>
  );
}
