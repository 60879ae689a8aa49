import type { DialValues } from '../../../../shared/contracts/dial';
import type { RunEvent, RunResult } from '../../../../shared/contracts/engine';
import type { StudyId } from '../../../../shared/contracts/study';
import type { EngineDoor } from '../../../lib/workers/engine-door';
import { isOtherFile } from './acquisition';
import { currentAssignment, currentStudy, type Plan, planRun } from './bench-selectors';
import type { BenchStore } from './bench-store';
import type { BenchState, Found } from './bench-types';
import { changedDials } from './dial-history';
import { attachPreviews } from './preview-runs';
import { rememberHashes } from './remember-hashes';
import { readingCost } from './run-cost';
import { doneWords } from './run-words';

/** While a hand moves a dial that counts anew, one run after it rests this long. */
const DIAL_REST_MS = 150;
/** The same where the file is long to read: nobody wants it begun for every stop of the hand. */
const LONG_REST_MS = 600;
const LONG_READING_S = 3;

interface ActiveRun {
  jobId: string;
  key: string;
  inputsKey: string;
  dials: DialValues;
}

/** Counts and pairs of the last whole run, from which dials may be answered without the bytes. */
interface AtHand {
  inputsKey: string;
  dials: DialValues;
  pairs: boolean;
}

export interface Runner {
  /** Runs again what was cancelled or failed. */
  again(): void;
  cancel(): void;
  detach(): void;
}

function isSamePlanSource(a: BenchState, b: BenchState): boolean {
  return (
    a.shelf === b.shelf &&
    a.study === b.study &&
    a.studies === b.studies &&
    a.chosen === b.chosen &&
    a.dials === b.dials &&
    a.seed === b.seed
  );
}

/**
 * Runs the study whenever what it needs is there and something changed; the newest request wins. While a dial is turned
 * that needs no byte, previews answer; the exact run follows once the hand rests.
 */
export function attachRunner(store: BenchStore, engine: EngineDoor): Runner {
  let timer: ReturnType<typeof setTimeout> | null = null;
  let active: ActiveRun | null = null;
  /** The last whole answer of each study: an undo may lead back to it past previews. */
  const exact = new Map<StudyId, Found>();
  const atHand = new Map<StudyId, AtHand>();
  let jobs = 0;
  const nextJob = (): string => `job-${++jobs}`;

  const keep = (found: Found, study: StudyId): void =>
    store.setState(({ found: all }) => ({ found: { ...all, [study]: found } }));

  /** What was at hand is of other inputs, or the engine has let it go. */
  const forget = (study: StudyId): void => {
    atHand.delete(study);
    store.setState(({ pairs }) => ({ pairs: { ...pairs, [study]: null } }));
  };

  const previews = attachPreviews({
    engine,
    nextJob,
    show: (study, inputsKey, found) => {
      // The inputs may be others by now.
      if (planRun(store.getState()).inputsKey === inputsKey) keep(found, study);
    },
    refuse: forget,
  });

  const dropActive = (): void => {
    if (timer !== null) clearTimeout(timer);
    timer = null;
    if (active !== null) engine.cancel(active.jobId);
    active = null;
  };

  const start = async (plan: Plan): Promise<void> => {
    const { request, key, inputsKey } = plan;
    if (request === null) return;
    dropActive();
    previews.drop();
    const jobId = nextJob();
    active = { jobId, key, inputsKey, dials: request.dials };
    const isCurrent = (): boolean => active?.jobId === jobId;
    const holders = currentAssignment(store.getState());
    if (atHand.get(request.study)?.inputsKey !== inputsKey) forget(request.study);
    let bytesRead = 0;
    store.setState({ run: { status: 'running', jobId, key, progress: null } });
    const onEvent = (event: RunEvent): void => {
      if (!isCurrent()) return;
      if (event.kind === 'progress') {
        bytesRead = Math.max(bytesRead, event.bytesDone);
        store.setState({ run: { status: 'running', jobId, key, progress: event } });
      } else {
        const { output, fraction } = event;
        keep({ output, result: null, provenance: null, isPreview: false, fraction, key }, request.study);
      }
    };
    const outcome = await engine.run({ ...request, jobId }, onEvent);
    if (!isCurrent()) return;
    active = null;
    const { say } = store.getState();
    if (outcome.status === 'ok') {
      const { pairs } = outcome.value;
      atHand.set(request.study, {
        inputsKey,
        dials: request.dials,
        pairs: pairs !== undefined && pairs.kept !== null,
      });
      finish(outcome.value, { key, study: request.study, holders, bytesRead });
    } else if (outcome.status === 'cancelled') {
      store.setState({ run: { status: 'cancelled', key } });
      say('Cancelled.');
    } else {
      store.setState({ run: { status: 'failed', key, problem: outcome.problem } });
      const { message, place } = outcome.problem;
      say(place === null ? message : `${place}: ${message}`, 'problem');
    }
    // A dial turned meanwhile may have waited for this answer.
    settle();
  };

  const finish = (
    result: RunResult,
    of: { key: string; study: StudyId; holders: Record<string, string | null>; bytesRead: number },
  ): void => {
    const { output, provenance, pairs } = result;
    const { key, study, holders, bytesRead } = of;
    const found = { output, result, provenance, isPreview: false, fraction: null, key };
    exact.set(study, found);
    keep(found, study);
    store.setState((state) => ({ pairs: { ...state.pairs, [study]: pairs ?? null } }));
    const before = store.getState().shelf;
    const shelf = rememberHashes(before, holders, provenance.inputs);
    store.setState({ run: { status: 'done', key, seconds: provenance.seconds }, shelf });
    const bytes = readingCost(store.getState()).bytes;
    // Only a run that read the files tells how long reading takes.
    if (bytesRead > bytes / 2 && provenance.seconds > 0)
      store.setState({ bytesPerSecond: bytes / provenance.seconds });
    const { say } = store.getState();
    for (const other of shelf.filter((a) => isOtherFile(a) && !before.includes(a))) {
      say(`${other.name} is not the file the session was made with: its fingerprint differs.`, 'problem');
      // The session's result was found in the other file.
      store.setState(({ saved }) => ({ saved: { ...saved, [study]: undefined } }));
    }
    const label = currentStudy(store.getState())?.label ?? study;
    say(doneWords(label, provenance.seconds, pairs));
  };

  const settle = (): void => {
    if (timer !== null) clearTimeout(timer);
    timer = null;
    const plan = planRun(store.getState());
    const { run, found, saved, study } = store.getState();
    if (plan.request === null) {
      dropActive();
      previews.drop();
      if (run.status !== 'idle') store.setState({ run: { status: 'idle' } });
      return;
    }
    // The acquisitions of an opened session are all here: its result is of this plan and of no other.
    if (saved[study]?.key === null)
      store.setState({ saved: { ...saved, [study]: { ...saved[study], key: plan.key } } });
    if (active?.key === plan.key) return;
    const known = found[study];
    const whole = [known, exact.get(study)].find((each) => each?.key === plan.key && each.result !== null);
    if (whole?.result) {
      dropActive();
      previews.drop();
      if (whole !== known) keep(whole, study);
      store.setState({ run: { status: 'done', key: plan.key, seconds: whole.result.provenance.seconds } });
      return;
    }
    if ((run.status === 'failed' || run.status === 'cancelled') && run.key === plan.key) return;
    const { request } = plan;
    if (isAnswerable(store.getState(), plan, atHand.get(study))) {
      // What runs from the counts at hand is overtaken; the hand is seen to first.
      dropActive();
      previews.ask(plan, request);
      timer = setTimeout(() => void start(planRun(store.getState())), DIAL_REST_MS);
      return;
    }
    // The counts under way serve the new dials as well; to begin again would throw them away.
    if (
      active?.inputsKey === plan.inputsKey &&
      needsOnly(store.getState(), active.dials, request.dials, ['finish'])
    )
      return;
    const onlyDials = known?.key.startsWith(plan.inputsKey) ?? false;
    timer = setTimeout(() => void start(planRun(store.getState())), onlyDials ? restOf(store.getState()) : 0);
  };

  const unsubscribe = store.subscribe((state, before) => {
    if (!isSamePlanSource(state, before)) settle();
  });
  settle();
  return {
    again: () => void start(planRun(store.getState())),
    cancel: () => {
      if (active === null) return;
      dropActive();
      // Dials that waited for the answer are cancelled with it.
      const { key } = planRun(store.getState());
      store.setState({ run: { status: 'cancelled', key } });
      store.getState().say('Cancelled; what was computed so far is kept.');
    },
    detach: () => {
      unsubscribe();
      dropActive();
      previews.drop();
    },
  };
}

function restOf(state: BenchState): number {
  return (readingCost(state).seconds ?? 0) > LONG_READING_S ? LONG_REST_MS : DIAL_REST_MS;
}

/** Do two settings of the dials differ, and only in dials of these needs? */
function needsOnly(
  state: BenchState,
  from: DialValues,
  to: DialValues,
  needs: readonly ('finish' | 'pairs' | 'bytes')[],
): boolean {
  const specs = currentStudy(state)?.dials ?? [];
  const changed = changedDials(specs, to, from);
  return changed.size > 0 && specs.every((spec) => needs.includes(spec.needs) || !changed.has(spec.id));
}

/** Can the plan be answered from the counts and pairs of the last whole run? */
function isAnswerable(state: BenchState, { inputsKey, request }: Plan, at: AtHand | undefined): boolean {
  if (at === undefined || request === null || at.inputsKey !== inputsKey) return false;
  return needsOnly(state, at.dials, request.dials, at.pairs ? ['finish', 'pairs'] : ['finish']);
}
