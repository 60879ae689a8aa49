import { useDeferredValue } from 'react';
import { LedgerSection } from '../../../components/output/LedgerSection';
import { OutputLedger } from '../../../components/output/OutputLedger';
import { planRun } from '../model/bench-selectors';
import type { LogLine } from '../model/bench-types';
import { stageWords } from '../model/run-words';
import { useBenchPlan, useBenchState } from './bench-context';
import { Region } from './Region';
import { SaveActions, type SaveActionsProps } from './SaveActions';
import { noteOfFound } from './StageRegion';

/** The numbers, the checks and the job log. */
export function LedgerRegion(props: SaveActionsProps) {
  const found = useDeferredValue(useBenchState((state) => state.found[state.study] ?? null));
  const key = useBenchPlan(planRun).key;
  const note = found === null ? null : noteOfFound(found, key);
  return (
    <Region title="ledger" note={note ?? undefined} actions={<SaveActions {...props} />}>
      {found === null ? (
        <div className="flex flex-col gap-5">
          <p className="text-sm text-dim">
            Quantities with their uncertainties, verdicts and checks stand here once a study has run.
          </p>
          <LogSection />
        </div>
      ) : (
        <OutputLedger output={found.output} provenance={found.provenance}>
          <LogSection />
        </OutputLedger>
      )}
    </Region>
  );
}

function LogSection() {
  const log = useBenchState((state) => state.log);
  const run = useBenchState((state) => state.run);
  const progress = run.status === 'running' ? run.progress : null;
  return (
    <LedgerSection title="Job log">
      {progress === null ? null : <p className="pb-1 font-mono text-xs text-text">{stageWords(progress)}</p>}
      <JobLog log={log} />
    </LedgerSection>
  );
}

function JobLog({ log }: { log: readonly LogLine[] }) {
  if (log.length === 0) return <p className="text-sm text-dim">Nothing has happened yet.</p>;
  return (
    <ol aria-label="Job log" className="flex flex-col font-mono text-xs text-dim">
      {[...log].reverse().map(({ id, at, text, tone }) => (
        <li key={id} className="flex gap-3 py-px">
          <time dateTime={at.toISOString()}>{at.toTimeString().slice(0, 8)}</time>
          <span className={tone === 'problem' ? 'text-fail' : 'text-text'}>
            {tone === 'problem' ? '× ' : ''}
            {text}
          </span>
        </li>
      ))}
    </ol>
  );
}
