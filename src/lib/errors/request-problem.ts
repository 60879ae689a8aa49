/** What can go wrong between the page and its server, besides the server's own refusals. */
export type RequestProblemCode =
  /** No answer at all. */
  | 'unreachable'
  /** An answer that is not what this page was built for. */
  | 'unreadable'
  /** Any code the server names. */
  | (string & {});

/** A request that did not do what was asked: the sentence for the person, and where. */
export class RequestProblem extends Error {
  readonly code: RequestProblemCode;
  readonly place: string | null;
  /** HTTP status; null when there was no answer. */
  readonly status: number | null;

  constructor(
    code: RequestProblemCode,
    message: string,
    details: { place?: string | null; status?: number | null; cause?: unknown } = {},
  ) {
    super(message, { cause: details.cause });
    this.name = 'RequestProblem';
    this.code = code;
    this.place = details.place ?? null;
    this.status = details.status ?? null;
  }
}

export function isSignedOut(thrown: unknown): boolean {
  return thrown instanceof RequestProblem && thrown.code === 'not-signed-in';
}

export function isMissing(thrown: unknown): boolean {
  return thrown instanceof RequestProblem && thrown.code === 'not-found';
}
