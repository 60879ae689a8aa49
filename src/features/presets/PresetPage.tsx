import { keepPreviousData, useQuery } from '@tanstack/react-query';
import { Link, useParams, useSearchParams } from 'react-router-dom';
import type { PresetRow } from '../../../shared/contracts/http';
import { LoadedPage } from '../../components/page/LoadedPage';
import { Page, Region } from '../../components/page/Page';
import { Button, buttonClass } from '../../components/ui/Button';
import { textLink } from '../../components/ui/link-class';
import { formatTime } from '../../lib/format-time';
import { useOwnGroup } from '../../lib/query/me';
import { presetQuery } from '../../lib/query/presets';
import { studiesQuery } from '../../lib/query/studies';
import { fileNameOf, saveJson } from '../../lib/save-file';
import { studyName } from '../../lib/study-names';
import { PresetDials } from './components/PresetDials';
import { PresetInputs } from './components/PresetInputs';
import { VersionList } from './components/VersionList';

const ALL = (
  <Link to="/presets" className={textLink}>
    All presets
  </Link>
);

function readVersion(search: URLSearchParams): number | null {
  const text = search.get('version');
  return text !== null && /^[1-9]\d{0,8}$/.test(text) ? Number(text) : null;
}

export function PresetPage() {
  const group = useOwnGroup();
  const { id = '' } = useParams();
  const [search] = useSearchParams();
  const version = readVersion(search);
  const newest = useQuery(presetQuery(group.id, id, null));
  const shown = useQuery({
    ...presetQuery(group.id, id, version),
    placeholderData: keepPreviousData,
  });
  return (
    <LoadedPage query={newest} what="the preset" title="Preset" otherwise={ALL}>
      {(last) => (
        <LoadedPage query={shown} what="this version" title="Preset" otherwise={ALL}>
          {(row) => <OnePreset row={row} newest={last.version} />}
        </LoadedPage>
      )}
    </LoadedPage>
  );
}

function OnePreset({ row, newest }: { row: PresetRow; newest: number }) {
  const version = row.version === newest ? '' : `&version=${row.version}`;
  const answers = useQuery(studiesQuery).data?.find((info) => info.id === row.study)?.answers;
  return (
    <Page
      title={row.name}
      heading={row.name}
      note={`${studyName(row.study)} · v${row.version} · ${row.by} · ${formatTime(row.updatedAt)}`}
      actions={
        <span className="flex flex-wrap items-center gap-2">
          <Link to={`/bench?preset=${row.id}${version}`} className={buttonClass('plain', 'sm')}>
            Open on the bench
          </Link>
          <Button
            size="sm"
            onClick={() => saveJson(row.preset, fileNameOf(row.name, `.v${row.version}.preset.json`))}
          >
            Download as JSON
          </Button>
        </span>
      }
    >
      <div className="grid lg:grid-cols-[3fr_2fr]">
        <div className="min-w-0 lg:min-h-[calc(100dvh-6rem)] lg:border-r">
          <Region name="dials">
            <PresetDials preset={row.preset} />
          </Region>
        </div>
        <div className="min-w-0">
          <Region name="study">
            <p className="pt-2">
              <span className="font-semibold">{studyName(row.study)}.</span>{' '}
              <span className="text-dim">{answers}</span>
            </p>
          </Region>
          <Region name="inputs">
            <PresetInputs preset={row.preset} />
          </Region>
          <Region name="versions" note={String(newest)}>
            <VersionList row={row} newest={newest} />
          </Region>
        </div>
      </div>
    </Page>
  );
}
