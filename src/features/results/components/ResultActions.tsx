import { ChevronDown } from 'lucide-react';
import { useState } from 'react';
import { Link, useNavigate } from 'react-router-dom';
import type { ResultRow } from '../../../../shared/contracts/http';
import { may } from '../../../../shared/contracts/permissions';
import type { MapFile } from '../../../../shared/contracts/result';
import { Button, buttonClass } from '../../../components/ui/Button';
import { Menu, type MenuItem } from '../../../components/ui/Menu';
import { mayUseBench, useMe, useOwnGroup } from '../../../lib/query/me';
import { toPreset } from '../../../lib/result-preset';
import { fileNameOf, saveJson } from '../../../lib/save-file';
import { toWholeFile } from '../model/stored-output';
import { DeleteResult } from './DeleteResult';

export interface ResultActionsProps {
  row: ResultRow;
  /** Null until every map is here. */
  maps: Record<string, MapFile> | null;
}

export function ResultActions({ row, maps }: ResultActionsProps) {
  const group = useOwnGroup();
  const me = useMe();
  const navigate = useNavigate();
  const [deleting, setDeleting] = useState(false);
  const preset = toPreset(row.result, row.name);
  const mayDelete = may(group.role, row.byId === me.user.id ? 'results.delete' : 'results.delete-any');
  const items: MenuItem[] = [
    {
      label: maps === null ? 'Result as JSON (maps still on their way)' : 'Result as JSON',
      disabled: maps === null,
      onSelect: () => {
        if (maps !== null) saveJson(toWholeFile(row.result, maps), fileNameOf(row.name, '.result.json'));
      },
    },
    {
      label: 'Preset that repeats it, as JSON',
      disabled: preset === null,
      onSelect: () => saveJson(preset, fileNameOf(row.name, '.preset.json')),
    },
  ];
  return (
    <span className="flex flex-wrap items-center gap-2">
      {mayUseBench(group) && preset !== null ? (
        <Link to={`/bench?result=${row.id}`} className={buttonClass('plain', 'sm')}>
          Open on the bench with this preset
        </Link>
      ) : null}
      <Menu
        align="end"
        items={items}
        trigger={
          <Button size="sm">
            Download
            <ChevronDown size={12} aria-hidden="true" />
          </Button>
        }
      />
      {mayDelete ? (
        <Button size="sm" variant="danger" onClick={() => setDeleting(true)}>
          Delete
        </Button>
      ) : null}
      <DeleteResult
        row={row}
        open={deleting}
        onClose={() => setDeleting(false)}
        onDone={() => void navigate('/results', { replace: true })}
      />
    </span>
  );
}
