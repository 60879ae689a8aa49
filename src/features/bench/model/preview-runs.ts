import type { RunRequest } from '../../../../shared/contracts/engine';
import type { StudyId } from '../../../../shared/contracts/study';
import type { EngineDoor } from '../../../lib/workers/engine-door';
import type { Plan } from './bench-selectors';
import type { Found } from './bench-types';

type Request = Omit<RunRequest, 'jobId'>;

export interface PreviewPlaces {
  engine: EngineDoor;
  nextJob(): string;
  show(study: StudyId, inputsKey: string, found: Found): void;
  /** The engine would need the bytes: no more previews until the next whole run. */
  refuse(study: StudyId): void;
}

export interface Previews {
  /** The newest wins, and one is under way at most. */
  ask(plan: Plan, request: Request): void;
  drop(): void;
}

/** Looks while the hand moves: few resamples, from what the engine has at hand. */
export function attachPreviews({ engine, nextJob, show, refuse }: PreviewPlaces): Previews {
  let waiting: { plan: Plan; request: Request } | null = null;
  let underWay: string | null = null;

  const next = async (): Promise<void> => {
    if (waiting === null || underWay !== null) return;
    const { plan, request } = waiting;
    waiting = null;
    const jobId = nextJob();
    underWay = jobId;
    // A look is told whole, in its answer.
    const outcome = await engine.run({ ...request, jobId, quick: true }, () => undefined);
    const isDropped = underWay !== jobId;
    if (!isDropped) underWay = null;
    if (!isDropped && outcome.status === 'ok') {
      const { output, provenance } = outcome.value;
      const found = { output, provenance, result: null, isPreview: true, fraction: null, key: plan.key };
      show(request.study, plan.inputsKey, found);
    } else if (outcome.status === 'error' && outcome.problem.code === 'needs-bytes') {
      // Any other problem is told by the exact run that follows.
      refuse(request.study);
    }
    void next();
  };

  return {
    ask(plan, request) {
      waiting = { plan, request };
      void next();
    },
    drop() {
      waiting = null;
      if (underWay !== null) engine.cancel(underWay);
      underWay = null;
    },
  };
}
