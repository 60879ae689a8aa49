import type {
  Inspection,
  RunEvent,
  RunRequest,
  RunResult,
  SourceRef,
} from '../../../shared/contracts/engine';
import type { Layout } from '../../../shared/contracts/layout';
import type { Outcome } from '../../../shared/contracts/outcome';
import type { StudyInfo } from '../../../shared/contracts/study';

/** The engine as the page sees it: never throws; a stopped worker answers with a problem like any other. */
export interface EngineDoor {
  studies(): Promise<Outcome<StudyInfo[]>>;
  inspect(source: SourceRef, layout: Layout | null): Promise<Outcome<Inspection>>;
  run(request: RunRequest, onEvent: (event: RunEvent) => void): Promise<Outcome<RunResult>>;
  cancel(jobId: string): void;
  /** Ends every worker and starts new ones; jobs under way answer with a problem. */
  restart(): void;
}
