import { useQuery, useQueryClient } from '@tanstack/react-query';
import { useCallback, useEffect, useRef, useState } from 'react';
import { useSearchParams } from 'react-router-dom';
import { may } from '../../../shared/contracts/permissions';
import { ProblemNote } from '../../components/page/ProblemNote';
import { Button } from '../../components/ui/Button';
import { useOwnGroup } from '../../lib/query/me';
import { samplesQuery } from '../../lib/query/samples';
import { takeFiles } from '../../state/dropped-files';
import { BenchRegions } from './components/BenchRegions';
import { type Bench, BenchProvider, useBench, useBenchState } from './components/bench-context';
import { CompanionDialog } from './components/CompanionDialog';
import { DialsRegion } from './components/DialsRegion';
import { DropZone } from './components/DropZone';
import { LedgerRegion } from './components/LedgerRegion';
import { ReadingDialog } from './components/ReadingDialog';
import { ShelfRegion } from './components/ShelfRegion';
import { StageRegion } from './components/StageRegion';
import { useBenchKeys } from './components/use-bench-keys';
import { openSample, openWanted, readWanted } from './model/open-bench';

/** The workbench: shelf, stage, dials and ledger around one engine. `bench` is for tests. */
export function BenchPage({ bench }: { bench?: Bench }) {
  return (
    <BenchProvider bench={bench}>
      <title>Bench · Gemel</title>
      <BenchBody />
    </BenchProvider>
  );
}

function BenchBody() {
  const { store } = useBench();
  const group = useOwnGroup();
  const readOnly = !may(group.role, 'presets.write');
  const picker = useRef<HTMLInputElement>(null);
  const [editing, setEditing] = useState<string | null>(null);
  const [clocking, setClocking] = useState<string | null>(null);
  const acquisition = useBenchState((state) => state.shelf.find(({ id }) => id === editing) ?? null);
  const clocked = useBenchState((state) => state.shelf.find(({ id }) => id === clocking) ?? null);
  const samples = useQuery(samplesQuery).data?.presets ?? [];
  const opening = useOpening(group.id);
  const addFiles = (files: readonly File[]): void =>
    store.getState().addFiles(files.map((file) => ({ file, sample: null })));
  useEffect(() => {
    store.getState().addFiles(takeFiles().map((file) => ({ file, sample: null })));
  }, [store]);
  const open = (): void => picker.current?.click();
  useBenchKeys({ open, readOnly });
  return (
    <DropZone onFiles={addFiles}>
      <h1 className="sr-only">Bench</h1>
      <input
        ref={picker}
        type="file"
        multiple
        hidden
        aria-label="Open acquisitions"
        data-testid="bench-files"
        onChange={(event) => {
          addFiles([...(event.target.files ?? [])]);
          // The same file again is a new wish.
          event.target.value = '';
        }}
      />
      {opening.problem === null ? null : (
        <div className="border-b border-line px-4 py-2">
          <ProblemNote error={opening.problem}>
            <Button size="sm" onClick={opening.retry}>
              Try again
            </Button>
            <Button size="sm" variant="quiet" onClick={opening.dismiss}>
              Dismiss
            </Button>
          </ProblemNote>
        </div>
      )}
      <BenchRegions
        shelf={
          <ShelfRegion
            readOnly={readOnly}
            samples={samples.map((entry) => ({
              label: entry.preset.name,
              open: () => opening.attempt(() => openSample(store, entry)),
            }))}
            onOpen={open}
            onEdit={setEditing}
            onClock={setClocking}
          />
        }
        stage={<StageRegion readOnly={readOnly} onEdit={setEditing} onOpen={open} />}
        dials={<DialsRegion readOnly={readOnly} />}
        ledger={<LedgerRegion group={group} />}
      />
      {acquisition === null ? null : (
        <ReadingDialog key={acquisition.id} acquisition={acquisition} onClose={() => setEditing(null)} />
      )}
      {clocked === null ? null : (
        <CompanionDialog key={clocked.id} acquisition={clocked} onClose={() => setClocking(null)} />
      )}
    </DropZone>
  );
}

/** Puts on the bench what the address asks for, once; another visit to the same address changes nothing. */
function useOpening(groupId: string) {
  const bench = useBench();
  const queries = useQueryClient();
  const [search] = useSearchParams();
  const [problem, setProblem] = useState<unknown>(null);
  const address = search.toString();
  const attempt = (action: () => Promise<void>): void => {
    setProblem(null);
    action().catch((thrown: unknown) => setProblem(thrown));
  };
  const openAddress = useCallback(() => {
    const wanted = readWanted(new URLSearchParams(address));
    if (wanted === null) return;
    setProblem(null);
    openWanted({ store: bench.store, queries, groupId }, wanted).catch((thrown: unknown) =>
      setProblem(thrown),
    );
  }, [address, groupId, bench, queries]);
  useEffect(() => {
    const key = `${groupId} ${address}`;
    if (bench.openedFrom.current === key) return;
    bench.openedFrom.current = key;
    openAddress();
  }, [address, groupId, bench, openAddress]);
  return { problem, attempt, retry: openAddress, dismiss: () => setProblem(null) };
}
