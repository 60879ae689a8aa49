import type { DialValues } from '../../../../shared/contracts/dial';
import type { RunEvent } from '../../../../shared/contracts/engine';
import { bytesWords, durationWords, shortCount } from '../../../components/output/reading-words';
import type { EngineDoor } from '../../../lib/workers/engine-door';
import { type Acquisition, type FilePart, isOtherFile, partsOf } from './acquisition';
import { currentAssignment, currentStudy, type Plan, planRun } from './bench-selectors';
import type { BenchStore } from './bench-store';
import type { BenchState, Found, Progress } from './bench-types';
import { changedDials } from './dial-history';

/** While a hand moves a dial that counts anew, one run after it rests this long. */
const DIAL_REST_MS = 150;
/** Dials that only finish anew are answered while the hand moves, at most this often and one at a time. */
const DIAL_PACE_MS = 100;

interface ActiveRun {
  jobId: string;
  key: string;
  inputsKey: string;
  dials: DialValues;
  startedAt: number;
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

/** Runs the study whenever what it needs is there and something changed; the newest request wins. */
export function attachRunner(store: BenchStore, engine: EngineDoor): Runner {
  let timer: ReturnType<typeof setTimeout> | null = null;
  let active: ActiveRun | null = null;
  /** The run started last, under way or not: what a dial was turned from. */
  let last: ActiveRun | null = null;
  let jobs = 0;

  const keep = (found: Found, study: BenchState['study']): void =>
    store.setState(({ found: all }) => ({ found: { ...all, [study]: found } }));

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
    const jobId = `job-${++jobs}`;
    active = { jobId, key, inputsKey, dials: request.dials, startedAt: Date.now() };
    last = active;
    const isCurrent = (): boolean => active?.jobId === jobId;
    const holders = currentAssignment(store.getState());
    store.setState({ run: { status: 'running', jobId, key, progress: null } });
    const onEvent = (event: RunEvent): void => {
      if (!isCurrent()) return;
      if (event.kind === 'progress') {
        store.setState({ run: { status: 'running', jobId, key, progress: event } });
      } else {
        keep({ output: event.output, result: null, fraction: event.fraction, key }, request.study);
      }
    };
    const outcome = await engine.run({ ...request, jobId }, onEvent);
    if (!isCurrent()) return;
    active = null;
    const { say } = store.getState();
    if (outcome.status === 'ok') {
      const { output, provenance } = outcome.value;
      keep({ output, result: outcome.value, fraction: null, key }, request.study);
      const before = store.getState().shelf;
      const shelf = rememberHashes(before, holders, provenance.inputs);
      store.setState({ run: { status: 'done', key, seconds: provenance.seconds }, shelf });
      for (const other of shelf.filter((a) => isOtherFile(a) && !before.includes(a))) {
        say(`${other.name} is not the file the session was made with: its fingerprint differs.`, 'problem');
        // The session's result was found in the other file.
        store.setState(({ saved }) => ({ saved: { ...saved, [request.study]: undefined } }));
      }
      const label = currentStudy(store.getState())?.label ?? request.study;
      say(`${label} done in ${durationWords(provenance.seconds)}.`);
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

  const settle = (): void => {
    if (timer !== null) clearTimeout(timer);
    timer = null;
    const plan = planRun(store.getState());
    const { run, found, saved, study } = store.getState();
    if (plan.request === null) {
      dropActive();
      if (run.status !== 'idle') store.setState({ run: { status: 'idle' } });
      return;
    }
    // The acquisitions of an opened session are all here: its result is of this plan and of no other.
    if (saved[study]?.key === null)
      store.setState({ saved: { ...saved, [study]: { ...saved[study], key: plan.key } } });
    if (active?.key === plan.key) return;
    const known = found[study];
    if (known?.key === plan.key && known.result !== null) {
      dropActive();
      const seconds = known.result.provenance.seconds;
      store.setState({ run: { status: 'done', key: plan.key, seconds } });
      return;
    }
    if ((run.status === 'failed' || run.status === 'cancelled') && run.key === plan.key) return;
    const isFinishOnly =
      last?.inputsKey === plan.inputsKey && needsOnlyFinish(store.getState(), last.dials, plan.request.dials);
    // The counts under way serve the new dials as well; to begin again would throw them away.
    if (isFinishOnly && active !== null) return;
    const onlyDials = known?.key.startsWith(plan.inputsKey) ?? false;
    const pace = last === null ? 0 : Math.max(0, last.startedAt + DIAL_PACE_MS - Date.now());
    const wait = isFinishOnly ? pace : onlyDials ? DIAL_REST_MS : 0;
    timer = setTimeout(() => void start(planRun(store.getState())), wait);
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
    },
  };
}

/** Do two settings of the dials differ only in what is done after the counting? */
function needsOnlyFinish(state: BenchState, from: DialValues, to: DialValues): boolean {
  const specs = currentStudy(state)?.dials ?? [];
  const changed = changedDials(specs, to, from);
  return changed.size > 0 && specs.every(({ id, needs }) => needs === 'finish' || !changed.has(id));
}

/**
 * Two files may share name and size, so the fingerprints go to the acquisition that served the input, one for each of its
 * files in their order.
 */
function rememberHashes(
  shelf: BenchState['shelf'],
  holders: Record<string, string | null>,
  inputs: readonly { name: string; sha256: string }[],
): BenchState['shelf'] {
  const hashes = new Map<string | null | undefined, string[]>();
  for (const { name, sha256 } of inputs) {
    const holder = holders[name];
    hashes.set(holder, [...(hashes.get(holder) ?? []), sha256]);
  }
  const isNews = shelf.some((a) =>
    partsOf(a).some(({ sha256 }, i) => (hashes.get(a.id)?.[i] ?? sha256) !== sha256),
  );
  if (!isNews) return shelf;
  return shelf.map((a) => withHashes(a, hashes.get(a.id) ?? []));
}

function withHashes(acquisition: Acquisition, found: readonly string[]): Acquisition {
  const { following, companion } = acquisition;
  const hashed = <T extends FilePart>(part: T, place: number): T => {
    const sha256 = found[place] ?? part.sha256;
    return sha256 === part.sha256 ? part : { ...part, sha256 };
  };
  const whole = hashed(acquisition, 0);
  const rest = following.map((part, i) => hashed(part, i + 1));
  const second = companion === null ? null : hashed(companion, following.length + 1);
  const isSame = second === companion && rest.every((part, i) => part === following[i]);
  return isSame ? whole : { ...whole, following: rest, companion: second };
}

/** Short, for the line beside the studies: how far, how fast, how long. */
export function progressWords({
  bytesDone,
  bytesTotal,
  counted,
  recordsPerSecond,
  secondsLeft,
}: Progress): string {
  const share = bytesTotal > 0 ? `${Math.floor((100 * bytesDone) / bytesTotal)} %` : '';
  const rate = recordsPerSecond > 0 ? `${shortCount(recordsPerSecond)} ${counted}/s` : '';
  const left = secondsLeft === null ? '' : `${durationWords(secondsLeft)} left`;
  return [share, rate, left].filter((part) => part !== '').join(' · ');
}

/** Long, for the ledger: what is going on and how much was read. */
export function stageWords({ stage, counted, recordsDone, bytesDone, bytesTotal }: Progress): string {
  return `${stage} · ${shortCount(recordsDone)} ${counted} · ${bytesWords(bytesDone)} of ${bytesWords(bytesTotal)}`;
}
