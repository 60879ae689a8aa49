import { useQuery } from '@tanstack/react-query';
import { Link } from 'react-router-dom';
import type { PresetRow } from '../../../shared/contracts/http';
import { Loaded } from '../../components/page/Loaded';
import { Page } from '../../components/page/Page';
import { textLink } from '../../components/ui/link-class';
import { Table, Td, Th, Tr } from '../../components/ui/Table';
import { formatTime } from '../../lib/format-time';
import { useOwnGroup } from '../../lib/query/me';
import { presetsQuery } from '../../lib/query/presets';
import { studyName } from '../../lib/study-names';

export function PresetsPage() {
  const group = useOwnGroup();
  const presets = useQuery(presetsQuery(group.id));
  return (
    <Page title="Presets" heading="Presets" note={presets.data ? String(presets.data.length) : undefined}>
      <div className="relative overflow-x-auto px-5 py-3">
        <Loaded query={presets} what="the presets">
          {(rows) => (rows.length === 0 ? <NoPresets /> : <PresetTable rows={rows} />)}
        </Loaded>
      </div>
    </Page>
  );
}

function NoPresets() {
  return (
    <p className="max-w-prose py-3 text-dim">
      The group has no preset yet. A preset keeps a study with its layouts, detector map, planes and dials, so
      that the next acquisition is analysed the same way. Set the dials on the{' '}
      <Link to="/bench" className={textLink}>
        bench
      </Link>{' '}
      and save them.
    </p>
  );
}

function PresetTable({ rows }: { rows: readonly PresetRow[] }) {
  return (
    <Table label="Presets of the group">
      <thead>
        <tr>
          <Th>name</Th>
          <Th>study</Th>
          <Th>inputs</Th>
          <Th numeric>dials set</Th>
          <Th numeric>version</Th>
          <Th>by</Th>
          <Th numeric>changed</Th>
          <Th>
            <span className="sr-only">bench</span>
          </Th>
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => (
          <Tr key={row.id} className="border-b border-line">
            <Td className="max-w-80 py-2">
              <Link to={`/presets/${row.id}`} className="font-semibold hover:underline">
                {row.name}
              </Link>
            </Td>
            <Td className="whitespace-nowrap">{studyName(row.study)}</Td>
            <Td mono className="text-xs text-dim">
              {Object.keys(row.preset.inputs).join(', ') || 'any'}
            </Td>
            <Td numeric>{Object.keys(row.preset.dials).length}</Td>
            <Td numeric>v{row.version}</Td>
            <Td className="whitespace-nowrap">{row.by}</Td>
            <Td numeric className="text-xs text-dim">
              <time dateTime={row.updatedAt}>{formatTime(row.updatedAt)}</time>
            </Td>
            <Td className="text-right whitespace-nowrap">
              <Link to={`/bench?preset=${row.id}`} className={textLink}>
                Open on the bench<span className="sr-only">: {row.name}</span>
              </Link>
            </Td>
          </Tr>
        ))}
      </tbody>
    </Table>
  );
}
