import { vi } from 'vitest';

export interface Asked {
  method: string;
  path: string;
  body: unknown;
}

export type Answer = { status?: number; body?: unknown };
type Handler = (asked: Asked) => Answer;

const stub: { handlers: Record<string, Handler>; asked: Asked[] } = { handlers: {}, asked: [] };

export function refusal(status: number, code: string, message: string): Answer {
  return { status, body: { error: { code, message, place: null } } };
}

/** A server made of "GET /api/me" -> answer; what it does not know it refuses as the real one does. */
export function stubServer(handlers: Record<string, Handler>): Asked[] {
  stub.handlers = handlers;
  stub.asked = [];
  vi.stubGlobal('fetch', async (path: string, init: RequestInit = {}) => {
    const asked: Asked = {
      method: init.method ?? 'GET',
      path,
      body: typeof init.body === 'string' ? JSON.parse(init.body) : undefined,
    };
    stub.asked.push(asked);
    const handler = stub.handlers[`${asked.method} ${path}`];
    const { status = 200, body } =
      handler?.(asked) ?? refusal(404, 'not-found', `No ${asked.method} ${path}.`);
    const text = body === undefined ? null : JSON.stringify(body);
    return new Response(text, { status, headers: { 'Content-Type': 'application/json' } });
  });
  return stub.asked;
}
