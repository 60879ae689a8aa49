import { afterEach, describe, expect, it, vi } from 'vitest';
import { z } from '../../../../shared/util/zod';
import { explain } from '../../../../src/lib/errors/explain';
import { RequestProblem } from '../../../../src/lib/errors/request-problem';
import { request } from '../../../../src/lib/http/request';
import { readBack, signInPath } from '../../../../src/lib/query/sign-in-path';
import { refusal, stubServer } from './server-stub';

const schema = z.object({ n: z.number() });

async function problemOf(promise: Promise<unknown>): Promise<RequestProblem> {
  const thrown = await promise.then(
    () => null,
    (error: unknown) => error,
  );
  if (!(thrown instanceof RequestProblem))
    throw new Error(`expected a RequestProblem, got ${String(thrown)}`);
  return thrown;
}

afterEach(() => vi.unstubAllGlobals());

describe('request', () => {
  it('gives the parsed answer and sends JSON', async () => {
    const asked = stubServer({ 'POST /api/x': () => ({ body: { n: 2, more: true } }) });
    expect(await request(schema, '/api/x', { method: 'POST', json: { a: 1 } })).toEqual({ n: 2 });
    expect(asked[0]?.body).toEqual({ a: 1 });
  });

  it('keeps the code, sentence and status of a refusal', async () => {
    stubServer({ 'GET /api/x': () => refusal(403, 'not-allowed', 'Guests may not.') });
    const problem = await problemOf(request(schema, '/api/x'));
    expect(problem).toMatchObject({ code: 'not-allowed', message: 'Guests may not.', status: 403 });
    expect(explain(problem)).toMatchObject({ sentence: 'Guests may not.', cause: 'not-allowed, status 403' });
  });

  it('says what it got when the answer has another form, is no JSON, or never came', async () => {
    stubServer({ 'GET /api/x': () => ({ body: { n: 'two' } }) });
    const other = await problemOf(request(schema, '/api/x'));
    expect(other.code).toBe('unreadable');
    expect(String(other.cause)).toMatch(/^n: /);

    vi.stubGlobal('fetch', async () => new Response('<html>gateway</html>', { status: 502 }));
    expect(await problemOf(request(schema, '/api/x'))).toMatchObject({ code: 'unreadable', status: 502 });

    vi.stubGlobal('fetch', () => Promise.reject(new TypeError('network')));
    expect(await problemOf(request(schema, '/api/x'))).toMatchObject({ code: 'unreachable', status: null });
  });

  it('lets an abort pass as what it is', async () => {
    vi.stubGlobal('fetch', () => Promise.reject(new DOMException('gone', 'AbortError')));
    await expect(request(schema, '/api/x')).rejects.toMatchObject({ name: 'AbortError' });
  });

  it('hides the words of an unexpected error in the cause', () => {
    const { sentence, cause } = explain(new TypeError('x is undefined', { cause: 'a string' }));
    expect(sentence).not.toContain('undefined');
    expect(cause).toContain('x is undefined');
    expect(cause).toContain('Caused by: a string');
  });
});

describe('the way back after signing in', () => {
  it('goes to where one was', () => {
    const path = signInPath('/results?words=night run');
    expect(readBack(new URL(path, 'http://x').searchParams)).toBe('/results?words=night run');
    expect(signInPath('/')).toBe('/sign-in');
  });

  it.each([
    '//evil.example',
    '/\\evil.example',
    'https://evil.example',
    'javascript:alert(1)',
    '/sign-in?back=/',
    '',
  ])('never leaves this page: %s', (back) => {
    expect(readBack(new URLSearchParams({ back }))).toBe('/');
  });
});
