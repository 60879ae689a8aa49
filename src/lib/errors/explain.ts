import { Problem } from '../../../shared/errors/problem';
import { RequestProblem } from './request-problem';

export interface Explanation {
  /** For the person. */
  sentence: string;
  place: string | null;
  /** For the fold: what a maintainer wants to see. */
  cause: string;
}

const UNEXPECTED =
  'This part of the page failed, and that is our mistake. Reload the page; what is saved on the server is safe.';

function describeCause(error: Error): string {
  const own = error.stack ?? `${error.name}: ${error.message}`;
  if (error.cause === undefined) return own;
  return `${own}\nCaused by: ${error.cause instanceof Error ? describeCause(error.cause) : String(error.cause)}`;
}

/** Any thrown thing as a sentence, with its technical cause apart. */
export function explain(thrown: unknown): Explanation {
  if (thrown instanceof RequestProblem) {
    const status = thrown.status === null ? '' : `, status ${thrown.status}`;
    const cause = thrown.cause === undefined ? '' : `\n${String(thrown.cause)}`;
    return {
      sentence: thrown.message,
      place: thrown.place,
      cause: `${thrown.code}${status}${cause}`,
    };
  }
  if (thrown instanceof Problem) return { sentence: thrown.message, place: thrown.place, cause: thrown.code };
  if (thrown instanceof Error) return { sentence: UNEXPECTED, place: null, cause: describeCause(thrown) };
  return { sentence: UNEXPECTED, place: null, cause: String(thrown) };
}
