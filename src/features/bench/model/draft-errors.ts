import type { z } from '../../../../shared/util/zod';

/** Sentences by field, e.g. "signal.width". */
export type DraftErrors = Record<string, string>;

/** Takes over what a schema says, unless a plainer sentence stands there already. */
export function collectIssues(error: z.ZodError, prefix: string, errors: DraftErrors): void {
  for (const { path, message, code } of error.issues) {
    const field = [prefix, ...path.map(String)].filter((part) => part !== '').join('.');
    errors[field] ??= code === 'invalid_type' ? 'Missing: write a number.' : `${message}.`;
  }
}
