import { errorBodySchema } from '../../../shared/contracts/http';
import type { z } from '../../../shared/util/zod';
import { RequestProblem } from '../errors/request-problem';

export interface RequestOptions {
  method?: 'GET' | 'POST' | 'PUT' | 'DELETE';
  /** Sent as JSON. */
  json?: unknown;
  signal?: AbortSignal;
}

/**
 * Asks the server and checks the answer against its schema, so that what the page works on is what it was built for.
 * Throws RequestProblem; an abort passes through as it is.
 */
export async function request<T>(
  schema: z.ZodType<T>,
  path: string,
  { method = 'GET', json, signal }: RequestOptions = {},
): Promise<T> {
  const response = await send(path, {
    method,
    signal: signal ?? null,
    credentials: 'same-origin',
    ...(json === undefined
      ? {}
      : { headers: { 'Content-Type': 'application/json' }, body: JSON.stringify(json) }),
  });
  const asked = `${method} ${path}`;
  const body = await readBody(response, asked);
  if (!response.ok) throw refusalOf(response, body, asked);
  const parsed = schema.safeParse(body);
  if (parsed.success) return parsed.data;
  const issue = parsed.error.issues[0];
  throw new RequestProblem(
    'unreadable',
    'The server answered in a form this page does not know. Reload the page to get the version that belongs to the server.',
    {
      place: asked,
      status: response.status,
      cause: `${issue?.path.join('.') ?? ''}: ${issue?.message ?? ''}`,
    },
  );
}

async function send(path: string, init: RequestInit): Promise<Response> {
  try {
    return await fetch(path, init);
  } catch (error) {
    if (error instanceof DOMException && error.name === 'AbortError') throw error;
    throw new RequestProblem(
      'unreachable',
      'The server does not answer. Check that it is running and that this machine reaches it, then try again.',
      { place: path, cause: error },
    );
  }
}

/** undefined when the answer has no body. */
async function readBody(response: Response, asked: string): Promise<unknown> {
  const text = await response.text();
  if (text === '') return undefined;
  try {
    return JSON.parse(text);
  } catch (error) {
    throw new RequestProblem(
      'unreadable',
      `The answer is not JSON (status ${response.status}). Something between this page and the server answered in its place; try again, then ask whoever runs the server.`,
      { place: asked, status: response.status, cause: error },
    );
  }
}

function refusalOf(response: Response, body: unknown, asked: string): RequestProblem {
  const parsed = errorBodySchema.safeParse(body);
  if (!parsed.success) {
    return new RequestProblem(
      'unreadable',
      `The server refused without a reason (status ${response.status}).`,
      {
        place: asked,
        status: response.status,
      },
    );
  }
  const { code, message, place } = parsed.data.error;
  return new RequestProblem(code, message, { place, status: response.status });
}
