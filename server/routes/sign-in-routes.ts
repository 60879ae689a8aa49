import express, { type Request, type Response, Router } from 'express';
import { rateLimit } from 'express-rate-limit';
import type { ErrorBody } from '../../shared/contracts/http';
import { z } from '../../shared/util/zod';
import { Refusal, type RefusalCode } from '../platform/refusal';
import type { RouteDeps } from './route-deps';

/** What of the sign-in library is open; the rest (sign-up, groups, invitations) is not reachable. */
const openPaths = {
  '/sign-in/email': 'post',
  '/sign-out': 'post',
  '/change-password': 'post',
  '/get-session': 'get',
} as const;

export interface SignInLimits {
  /** Failed sign-ins from one address in five minutes. */
  failures: number;
  /** Any calls from one address in five minutes. */
  calls: number;
}

export function createSignInRouter(deps: RouteDeps, limits: SignInLimits): Router {
  const router = Router();
  const limiter = (limit: number, onlyFailures: boolean) =>
    rateLimit({
      windowMs: 5 * 60_000,
      limit,
      skipSuccessfulRequests: onlyFailures,
      standardHeaders: 'draft-8',
      legacyHeaders: false,
      // Anybody may send this header; GEMEL_PROXY decides whether it is read.
      validate: { xForwardedForHeader: false },
      handler: (_request, _response, next) =>
        next(
          new Refusal('too-many', 'Too many attempts from this address: wait five minutes and try again.'),
        ),
    });
  router.use('/auth', limiter(limits.calls, false));
  router.use('/auth/sign-in', limiter(limits.failures, true));
  for (const [path, method] of Object.entries(openPaths)) {
    router[method](`/auth${path}`, express.json({ limit: '16kb' }), (request, response) =>
      passOn(deps, request, response),
    );
  }
  return router;
}

async function passOn(deps: RouteDeps, request: Request, response: Response): Promise<void> {
  const headers = new Headers();
  for (const name of ['cookie', 'origin', 'user-agent']) {
    const value = request.get(name);
    if (value !== undefined) headers.set(name, value);
  }
  const post = request.method === 'POST';
  if (post) headers.set('content-type', 'application/json');
  const answer = await deps.signInLibrary(
    new globalThis.Request(new URL(request.originalUrl, deps.origin), {
      method: request.method,
      headers,
      body: post ? JSON.stringify(request.body ?? {}) : undefined,
    }),
  );
  const cookies = answer.headers.getSetCookie();
  if (cookies.length > 0) response.setHeader('Set-Cookie', cookies);
  response.set('Cache-Control', 'no-store');
  const text = await answer.text();
  if (answer.ok)
    response
      .status(answer.status)
      .type('json')
      .send(text === '' ? 'null' : text);
  else response.status(answer.status).json(explain(answer.status, text));
}

const libraryErrorSchema = z.object({ code: z.string().optional(), message: z.string().optional() });

/** The library's refusal in our words. */
function explain(status: number, text: string): ErrorBody {
  const parsed = libraryErrorSchema.safeParse(text.startsWith('{') ? JSON.parse(text) : {});
  const said = parsed.success ? (parsed.data.message ?? '') : '';
  const tell = (code: RefusalCode, message: string) => new Refusal(code, message).toBody();
  if (status === 401) return tell('wrong-sign-in', 'This e-mail and this password do not belong together.');
  if (status >= 500) return tell('internal', 'Signing in failed on the server; its log says why.');
  return tell('bad-input', `The sign-in request was refused: ${said === '' ? `status ${status}` : said}.`);
}
