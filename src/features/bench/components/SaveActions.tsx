import { useQueryClient } from '@tanstack/react-query';
import { type ReactNode, useState } from 'react';
import { Link } from 'react-router-dom';
import { may } from '../../../../shared/contracts/permissions';
import { Button } from '../../../components/ui/Button';
import { Menu } from '../../../components/ui/Menu';
import { explain } from '../../../lib/errors/explain';
import type { Group } from '../../../lib/query/me';
import { savePreset, saveResult, saveSession } from '../api/save';
import { presetOfBench, presetOfResult } from '../model/bench-records';
import { currentStudy, guessedReadings, linkedResult } from '../model/bench-selectors';
import type { SessionRef } from '../model/bench-types';
import { sessionOfBench } from '../model/session-bench';
import { useBench, useBenchPlan, useBenchState } from './bench-context';
import { NameDialog } from './NameDialog';

export interface SaveActionsProps {
  group: Group;
}

type Kind = 'result' | 'preset' | 'version' | 'session';

const TITLES: Record<Kind, string> = {
  result: 'Save the result',
  preset: 'Save as a preset',
  version: 'Save the next version of the preset',
  session: 'Save the session',
};

const EXPLANATIONS: Record<Kind, string> = {
  result:
    'Quantities, verdicts, checks, maps and provenance go to the group. The raw data stays on this machine.',
  preset:
    'The study with its layouts, detector maps, planes and dials, to run unchanged on the next acquisition.',
  version: 'The earlier versions stay as they are.',
  session:
    'Studies, dials, readings and the fingerprints of the acquisitions, to go on later. Only you see it.',
};

/** Keeping what was found: result, preset, session, each with a link to where it is. */
export function SaveActions({ group }: SaveActionsProps) {
  const { store, openedFrom } = useBench();
  const queries = useQueryClient();
  const [kind, setKind] = useState<Kind | null>(null);
  const [said, setSaid] = useState<ReactNode>(null);
  const result = useBenchState((state) => state.found[state.study]?.result ?? null);
  const preset = useBenchState((state) => (state.preset?.study === state.study ? state.preset : null));
  const session = useBenchState((state) => state.session);
  const linked = useBenchState((state) => (state.session === null ? null : linkedResult(state)));
  const study = useBenchPlan(currentStudy);
  const isGuessed = useBenchPlan(guessedReadings).length > 0;
  const mayWritePresets = may(group.role, 'presets.write');
  const maySave = may(group.role, 'results.write');

  const save = async (name: string): Promise<void> => {
    const state = store.getState();
    const found = state.found[state.study];
    if (kind === 'result' && found?.result) {
      const { result: run, key } = found;
      const saved = await saveResult(group.id, name, run, presetOfResult(state, run));
      store.setState((now) => ({ saved: { ...now.saved, [state.study]: { id: saved.id, key } } }));
      setSaid(<SavedLink what="Result" name={name} to={`/results/${saved.id}`} />);
    } else if (kind === 'preset' || kind === 'version') {
      const versionOf = kind === 'version' ? (preset?.id ?? null) : null;
      const row = await savePreset(group.id, presetOfBench(state, name, { fixProposals: true }), versionOf);
      const { study: id, dials, inputs } = row.preset;
      store.setState({ preset: { id: row.id, name, version: row.version, study: id, dials, inputs } });
      setSaid(<SavedLink what={`Preset v${row.version}`} name={name} to={`/presets/${row.id}`} />);
    } else if (kind === 'session') {
      await keepSession(name, null);
      return;
    }
    await finish(name);
  };

  const finish = async (name: string): Promise<void> => {
    store.getState().say(`Saved: ${name}.`);
    await queries.invalidateQueries({ queryKey: ['groups', group.id] });
  };

  const keepSession = async (name: string, id: string | null): Promise<void> => {
    const row = await saveSession(group.id, name, sessionOfBench(store.getState(), name), id);
    store.setState({ session: { id: row.id, name: row.name } });
    const address = `session=${row.id}`;
    // The bench is what was saved: following the link must not empty it.
    openedFrom.current = `${group.id} ${address}`;
    setSaid(<SavedLink what="Session" name={name} to={`/bench?${address}`} />);
    await finish(name);
  };

  const saveOver = (opened: SessionRef): void => {
    keepSession(opened.name, opened.id).catch((thrown: unknown) =>
      setSaid(<span className="text-fail">{explain(thrown).sentence}</span>),
    );
  };

  const close = (): void => setKind(null);
  if (!maySave) {
    return <span>Guests read; an analyst or a runner of the group can save.</span>;
  }
  return (
    <span className="flex flex-wrap items-center gap-2">
      <span role="status" className="font-sans text-sm text-text" data-testid="save-status">
        {said ??
          (linked === null ? null : (
            <Link to={`/results/${linked}`} className="underline underline-offset-2">
              Result saved from this session
            </Link>
          ))}
      </span>
      <Menu
        align="end"
        trigger={<Button size="sm">Save …</Button>}
        items={[
          ...(session === null
            ? [{ label: 'Save session', onSelect: () => setKind('session') }]
            : [
                { label: 'Save session', onSelect: () => saveOver(session) },
                { label: 'Save session as …', onSelect: () => setKind('session') },
              ]),
          {
            label: mayWritePresets ? 'Save as preset' : 'Save as preset (analysts and leads)',
            disabled: !mayWritePresets,
            onSelect: () => setKind('preset'),
          },
          ...(preset?.id && mayWritePresets
            ? [{ label: `Save next version of ${preset.name}`, onSelect: () => setKind('version') }]
            : []),
        ]}
      />
      <Button
        size="sm"
        variant="primary"
        disabled={result === null || isGuessed}
        onClick={() => setKind('result')}
      >
        Save result
      </Button>
      {kind === null ? null : (
        <NameDialog
          title={TITLES[kind]}
          description={EXPLANATIONS[kind]}
          suggestion={suggest(kind, study?.label ?? '', preset?.name ?? null)}
          onSave={save}
          explainFailure={(thrown) => explain(thrown).sentence}
          onClose={close}
        />
      )}
    </span>
  );
}

function suggest(kind: Kind, study: string, preset: string | null): string {
  if (kind === 'version' && preset !== null) return preset;
  const now = new Date();
  const pad = (part: number): string => String(part).padStart(2, '0');
  const day = `${now.getFullYear()}-${pad(now.getMonth() + 1)}-${pad(now.getDate())}`;
  return kind === 'preset'
    ? `${study} ${day}`
    : `${study} ${day} ${pad(now.getHours())}:${pad(now.getMinutes())}`;
}

function SavedLink({ what, name, to }: { what: string; name: string; to: string }) {
  return (
    <>
      {what} saved:{' '}
      <Link to={to} className="underline underline-offset-2">
        {name}
      </Link>
    </>
  );
}
