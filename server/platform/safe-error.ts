/**
 * An error for the log, by a list of what is told: libraries hang connections, queries with their values and passwords
 * onto the errors they throw.
 */
export interface SafeError {
  type: string;
  message: string;
  code?: string;
  /** The places only: the first lines of a stack repeat the message. */
  stack?: string;
  cause?: SafeError;
}

const deepest = 5;

export function describeError(thrown: unknown, depth = 0): SafeError {
  // The request log hands over its own summary, with the error itself as `raw`.
  if (!(thrown instanceof Error) && typeof thrown === 'object' && thrown !== null && 'raw' in thrown) {
    return describeError(thrown.raw, depth);
  }
  if (!(thrown instanceof Error)) return { type: typeof thrown, message: redact(String(thrown)) };
  const code = codeOf(thrown);
  const stack = thrown.stack
    ?.split('\n')
    .filter((line) => /^\s+at /.test(line))
    .join('\n');
  const cause = thrown instanceof AggregateError ? thrown.errors[0] : thrown.cause;
  return {
    type: thrown.name,
    message: messageOf(thrown),
    ...(code === undefined ? {} : { code }),
    ...(stack === undefined ? {} : { stack }),
    ...(cause === undefined || depth === deepest ? {} : { cause: describeError(cause, depth + 1) }),
  };
}

/** Message of what lies at the bottom: the layers above only say that something failed. */
export function reasonOf(thrown: unknown): string {
  let error = describeError(thrown);
  while (error.cause !== undefined) error = error.cause;
  return error.message;
}

/** For the console, when the server cannot start. */
export function printError(thrown: unknown): string {
  const lines: string[] = [];
  for (let error: SafeError | undefined = describeError(thrown); error !== undefined; error = error.cause) {
    lines.push(`${error.type}: ${error.message}`, error.stack ?? '');
  }
  return lines.filter((line) => line !== '').join('\n');
}

/** Without the values bound to a query and without the password of an address. */
export function redact(text: string): string {
  return text.replace(/\nparams:[\s\S]*/, '').replace(/(\w:\/\/[^\s:/@]*):\S*@/g, '$1:***@');
}

function messageOf(error: Error): string {
  const code = codeOf(error);
  // SQLSTATE class 22, data exception: PostgreSQL quotes the value in the message.
  if (code !== undefined && /^22[0-9A-Z]{3}$/.test(code)) return `a value was refused (SQLSTATE ${code})`;
  return redact(error.message === '' ? (code ?? error.name) : error.message);
}

function codeOf(error: Error): string | undefined {
  return 'code' in error && typeof error.code === 'string' ? error.code : undefined;
}
