import { readFile } from 'node:fs/promises';
import { type ParseArgsConfig, parseArgs } from 'node:util';
import { Problem } from '../../../shared/errors/problem';
import type { z } from '../../../shared/util/zod';

type Options = NonNullable<ParseArgsConfig['options']>;

/** Positional arguments and options of a verb. Throws `bad-input` naming the option. */
export function readArguments<T extends Options>(args: readonly string[], options: T, usage: string) {
  try {
    return parseArgs({ args: [...args], options, allowPositionals: true, strict: true });
  } catch (thrown) {
    const why = thrown instanceof Error ? thrown.message : String(thrown);
    throw new Problem('bad-input', `${why.split('. ')[0]}. Usage: ${usage}`, 'command line');
  }
}

export function requireOne(positionals: readonly string[], what: string, usage: string): string {
  const [only, ...rest] = positionals;
  if (only !== undefined && rest.length === 0) return only;
  throw new Problem(
    'bad-input',
    `Expected one ${what}, found ${positionals.length}. Usage: ${usage}`,
    'command line',
  );
}

export function wholeNumber(
  text: string | undefined,
  option: string,
  fallback: number,
  least: number,
): number {
  if (text === undefined) return fallback;
  const value = Number(text);
  if (Number.isSafeInteger(value) && value >= least) return value;
  throw new Problem(
    'bad-input',
    `--${option} takes a whole number from ${least} on, found "${text}".`,
    `--${option}`,
  );
}

/** A JSON file against its schema. Throws `unreadable` or `bad-preset` naming the path inside the file. */
export async function readJsonFile<T extends z.ZodType>(
  path: string,
  schema: T,
  what: string,
): Promise<z.infer<T>> {
  let text: string;
  try {
    text = await readFile(path, 'utf8');
  } catch (thrown) {
    const why = thrown instanceof Error ? thrown.message : String(thrown);
    throw new Problem('unreadable', `The ${what} ${path} cannot be read: ${why}; check the name.`, path);
  }
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch (thrown) {
    const why = thrown instanceof Error ? thrown.message : String(thrown);
    throw new Problem('bad-preset', `The ${what} ${path} is not JSON: ${why}.`, path);
  }
  const parsed = schema.safeParse(value);
  if (parsed.success) return parsed.data;
  const issue = parsed.error.issues[0];
  const where = issue === undefined || issue.path.length === 0 ? 'the whole' : issue.path.join('.');
  throw new Problem(
    'bad-preset',
    `The ${what} ${path} does not fit at ${where}: ${issue?.message ?? 'unknown'}; see "template" for the shape.`,
    `${path}, ${where}`,
  );
}
