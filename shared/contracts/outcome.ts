import type { ProblemData } from '../errors/problem';

/** What a worker answers; it never throws across, because comlink keeps only message, name and stack. */
export type Outcome<T> =
  | { status: 'ok'; value: T }
  | { status: 'cancelled' }
  | { status: 'error'; problem: ProblemData };
