/**
 * What went wrong, where, and what to do about it. Thrown inside a room, turned into a plain `ProblemData` at every
 * boundary (worker, HTTP, command line), because class identity does not survive those.
 */
export type ProblemCode =
  | 'empty-file'
  | 'not-this-format'
  | 'truncated'
  | 'wrong-length'
  | 'missing-dataset'
  | 'wrong-type'
  | 'bad-layout'
  | 'bad-detector'
  | 'bad-plane'
  | 'bad-dial'
  | 'bad-preset'
  | 'bad-input'
  | 'missing-input'
  | 'out-of-order'
  | 'unsupported'
  | 'newer-version'
  | 'unreadable'
  | 'needs-bytes'
  | 'internal';

export interface ProblemData {
  code: ProblemCode;
  /** One sentence a colleague would say: what was expected, what was found, what to do. */
  message: string;
  /** Where: a file with its byte, record, row, dataset or page; a dial; an input. */
  place: string | null;
}

export class Problem extends Error {
  readonly code: ProblemCode;
  readonly place: string | null;

  constructor(code: ProblemCode, message: string, place: string | null = null) {
    super(message);
    this.name = 'Problem';
    this.code = code;
    this.place = place;
  }

  toData(): ProblemData {
    return { code: this.code, message: this.message, place: this.place };
  }
}

/** Cancelling is no error: it has its own type so that no catch mistakes it for one. */
export class Cancelled extends Error {
  constructor() {
    super('Cancelled');
    this.name = 'Cancelled';
  }
}

/** Any thrown thing as plain data. Libraries throw strings and foreign classes, so nothing is assumed. */
export function toProblemData(thrown: unknown, place: string | null = null): ProblemData {
  if (thrown instanceof Problem) return { ...thrown.toData(), place: thrown.place ?? place };
  const message = thrown instanceof Error ? thrown.message : String(thrown);
  return { code: 'internal', message, place };
}
