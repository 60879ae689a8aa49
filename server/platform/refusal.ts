import type { ErrorBody } from '../../shared/contracts/http';

/** Why a request is refused; each has one HTTP status. */
const statusOf = {
  'bad-input': 400,
  'malformed-json': 400,
  'newer-version': 400,
  'not-signed-in': 401,
  'wrong-sign-in': 401,
  'not-allowed': 403,
  'foreign-origin': 403,
  'foreign-host': 403,
  'not-found': 404,
  'too-large': 413,
  'not-json': 415,
  'too-many': 429,
  internal: 500,
  'not-ready': 503,
} as const;
export type RefusalCode = keyof typeof statusOf;

/** A request the server will not do, with the sentence for the person who asked. */
export class Refusal extends Error {
  readonly code: RefusalCode;
  readonly place: string | null;

  /** `cause` goes to the log, not to the person. */
  constructor(code: RefusalCode, message: string, place: string | null = null, cause?: unknown) {
    super(message, cause === undefined ? {} : { cause });
    this.name = 'Refusal';
    this.code = code;
    this.place = place;
  }

  get status(): number {
    return statusOf[this.code];
  }

  toBody(): ErrorBody {
    return { error: { code: this.code, message: this.message, place: this.place } };
  }
}

/** Also what a person outside the group is told, so that the answer does not show what exists. */
export function notFound(what: string): Refusal {
  return new Refusal('not-found', `There is no such ${what}, or it is not in a group of yours.`);
}

/** Stops the start of the server: the message is printed as it is and the process exits with code 1. */
export class StartProblem extends Error {
  constructor(message: string) {
    super(message);
    this.name = 'StartProblem';
  }
}
