import { useDeferredValue, useMemo } from 'react';
import { OutputStage } from '../../../components/output/OutputStage';
import { Button } from '../../../components/ui/Button';
import { CheckMark } from '../../../components/ui/CheckMark';
import { ProgressBar } from '../../../components/ui/ProgressBar';
import { useTheme } from '../../../lib/theme/theme';
import { currentDials, currentStudy, guessedReadings, planRun } from '../model/bench-selectors';
import type { Found } from '../model/bench-types';
import { progressWords, stageWords } from '../model/run-words';
import { useBench, useBenchPlan, useBenchState } from './bench-context';
import { EmptyStage } from './EmptyStage';
import { ProblemText } from './ProblemText';
import { StudyPicker } from './StudyPicker';
import { useTurnCost } from './use-turn-cost';

export interface StageRegionProps {
  readOnly: boolean;
  onEdit(acquisitionId: string): void;
  onOpen(): void;
}

/** "preview", "41 % read", "from earlier settings": what keeps a number from being final. */
export function noteOfFound(found: Found, key: string): string | null {
  if (found.isPreview) return 'preview';
  if (found.fraction !== null) return `${Math.floor(found.fraction * 100)} % read`;
  return found.key === key ? null : 'from earlier settings';
}

/** The plots of the study, with what is missing or under way above them. */
export function StageRegion({ readOnly, onEdit, onOpen }: StageRegionProps) {
  const { store } = useBench();
  const theme = useTheme();
  const study = useBenchPlan(currentStudy);
  const plan = useBenchPlan(planRun);
  const dials = useBenchPlan(currentDials);
  // Ten maps are drawn between clicks and keys, not instead of them.
  const found = useDeferredValue(useBenchState((state) => state.found[state.study] ?? null));
  const cost = useTurnCost();
  const answers = useMemo(
    () => <p className="max-w-prose text-sm text-dim">{study?.answers}</p>,
    [study?.answers],
  );
  return (
    <section aria-label="stage" className="flex h-full min-h-0 flex-col">
      <header className="flex min-h-9 shrink-0 flex-wrap items-stretch justify-between gap-x-4 border-b border-line px-4">
        <h2 className="sr-only">stage</h2>
        <StudyPicker />
        <RunLine />
      </header>
      <div
        id="bench-stage"
        role="tabpanel"
        aria-label={study?.label ?? 'Study'}
        className="min-h-0 flex-1 overflow-auto px-4 py-3 focus-visible:-outline-offset-2"
        // biome-ignore lint/a11y/noNoninteractiveTabindex: a region that scrolls must be reachable by keyboard
        tabIndex={0}
      >
        <RunProblem />
        {study !== null && plan.needs.length > 0 ? (
          <EmptyStage study={study} needs={plan.needs} onEdit={readOnly ? null : onEdit} onOpen={onOpen} />
        ) : null}
        {found === null ? null : <Guesses onEdit={readOnly ? null : onEdit} />}
        {found === null ? null : (
          <OutputStage
            output={found.output}
            theme={theme}
            note={noteOfFound(found, plan.key)}
            specs={study?.dials}
            dials={dials}
            onTurn={readOnly ? undefined : store.getState().turn}
            turnCost={cost.window}
          >
            {answers}
          </OutputStage>
        )}
        {found === null && plan.needs.length === 0 ? <Waiting isKnown={study !== null} /> : null}
      </div>
    </section>
  );
}

/** Numbers from a reading that nobody has looked over say so above all else. */
function Guesses({ onEdit }: { onEdit: ((acquisitionId: string) => void) | null }) {
  const guessed = useBenchPlan(guessedReadings);
  if (guessed.length === 0) return null;
  return (
    <ul className="mb-4 flex flex-col gap-1.5" aria-label="Readings to look over">
      {guessed.map(({ id, name }) => (
        <li key={id} className="flex flex-wrap items-center gap-x-3 gap-y-1 text-sm">
          <CheckMark status="caution" />
          <span className="min-w-0 flex-1">
            Tick and detector map of {name} are only proposed from its bytes. Look its reading over and apply
            it before a number is trusted; until then no result can be saved.
          </span>
          {onEdit === null ? null : (
            <Button size="sm" onClick={() => onEdit(id)}>
              Open its reading
            </Button>
          )}
        </li>
      ))}
    </ul>
  );
}

/** Why there is no picture yet, while nothing is missing. */
function Waiting({ isKnown }: { isKnown: boolean }) {
  const run = useBenchState((state) => state.run);
  const isStarted = useBenchState((state) => state.studies.length > 0 || state.studiesProblem !== null);
  if (run.status === 'failed') return null;
  const words = !isStarted
    ? 'Starting the engine.'
    : !isKnown
      ? 'This version of Gemel does not have the study that was asked for. Choose another above.'
      : run.status === 'cancelled'
        ? 'Cancelled before the first picture.'
        : 'The first picture is on its way.';
  return <p className="py-6 text-dim">{words}</p>;
}

/** Progress with its cancel, at the right of the studies. */
function RunLine() {
  const { runner } = useBench();
  const run = useBenchState((state) => state.run);
  const isPreview = useBenchState((state) => state.found[state.study]?.isPreview ?? false);
  if (run.status === 'cancelled') {
    return (
      <span className="flex items-center gap-3 font-mono text-xs text-dim" role="status">
        cancelled
        <Button size="sm" onClick={runner.again}>
          Run again
        </Button>
      </span>
    );
  }
  if (isPreview && run.status === 'done') {
    return (
      <span className="flex items-center font-mono text-xs text-warn" role="status">
        preview
      </span>
    );
  }
  if (run.status === 'done') {
    return (
      <span className="flex items-center font-mono text-xs text-dim" role="status">
        done in {run.seconds.toFixed(1)} s
      </span>
    );
  }
  if (run.status !== 'running') return null;
  const { progress } = run;
  const share =
    progress === null || progress.bytesTotal === 0 ? null : progress.bytesDone / progress.bytesTotal;
  return (
    <span className="flex min-h-9 min-w-0 items-center gap-3 font-mono text-xs text-dim">
      <span
        className="min-w-0 truncate"
        data-testid="run-progress"
        title={progress === null ? undefined : stageWords(progress)}
      >
        {progress === null ? 'starting' : progressWords(progress)}
      </span>
      <span className="w-24 shrink-0">
        <ProgressBar value={share} label="Reading" />
      </span>
      <Button size="sm" onClick={runner.cancel}>
        Cancel
      </Button>
    </span>
  );
}

function RunProblem() {
  const { runner, engine, store } = useBench();
  const run = useBenchState((state) => state.run);
  const studiesProblem = useBenchState((state) => state.studiesProblem);
  if (studiesProblem !== null) {
    return (
      <ProblemText problem={studiesProblem}>
        <Button
          size="sm"
          onClick={() => {
            engine.restart();
            void store.getState().loadStudies();
          }}
        >
          Start the engine again
        </Button>
      </ProblemText>
    );
  }
  if (run.status !== 'failed') return null;
  const isInternal = run.problem.code === 'internal';
  return (
    <div className="mb-4">
      <ProblemText problem={run.problem}>
        <Button
          size="sm"
          onClick={() => {
            if (isInternal) engine.restart();
            runner.again();
          }}
        >
          {isInternal ? 'Start the engine again' : 'Try again'}
        </Button>
      </ProblemText>
    </div>
  );
}
