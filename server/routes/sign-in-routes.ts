import express, { type Request, type Response, Router } from 'express';
import { rateLimit } from 'express-rate-limit';
import { z } from '../../shared/util/zod';
import { Refusal } from '../platform/refusal';
import { requirePerson } from './people-routes';
import type { RouteDeps } from './route-deps';

/** What of the sign-in library is open; the rest (sign-up, groups, invitations, reading the token) is not reachable. */
const openPaths = ['/sign-in/email', '/sign-out', '/change-password'] as const;

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
  const parse = express.json({ limit: '16kb' });
  router.post('/auth/sign-in/email', parse, (request, _response, next) => {
    const { success, data } = emailSchema.safeParse(request.body);
    if (success && deps.isBarred(data.email)) throw wrongSignIn();
    next();
  });
  router.post('/auth/change-password', async (request, _response, next) => {
    await requirePerson(deps, request);
    next();
  });
  for (const path of openPaths) {
    router.post(`/auth${path}`, parse, (request, response) => passOn(deps, request, response));
  }
  return router;
}

async function passOn(deps: RouteDeps, request: Request, response: Response): Promise<void> {
  const headers = new Headers();
  for (const name of ['cookie', 'origin', 'user-agent']) {
    const value = request.get(name);
    if (value !== undefined) headers.set(name, value);
  }
  headers.set('content-type', 'application/json');
  const answer = await deps.signInLibrary(
    new globalThis.Request(new URL(request.originalUrl, deps.origin), {
      method: 'POST',
      headers,
      body: JSON.stringify(request.body ?? {}),
    }),
  );
  const cookies = answer.headers.getSetCookie();
  if (cookies.length > 0) response.setHeader('Set-Cookie', cookies);
  response.set('Cache-Control', 'no-store');
  // The library's own answer holds the session token, which scripts of the page are not to see.
  if (!answer.ok) throw explain(answer.status, await answer.text());
  response.json({});
}

const emailSchema = z.object({ email: z.string() });
const libraryErrorSchema = z.object({ message: z.string().optional() });

function wrongSignIn(): Refusal {
  return new Refusal('wrong-sign-in', 'This e-mail and this password do not belong together.');
}

/** What the library says in its JSON; empty when it answers something else. */
function messageOf(text: string): string {
  try {
    return libraryErrorSchema.parse(JSON.parse(text)).message ?? '';
  } catch {
    // Not its usual shape: the status then speaks for itself.
    return '';
  }
}

/** The library's refusal in our words. */
export function explain(status: number, text: string): Refusal {
  const said = messageOf(text);
  if (status === 401) return wrongSignIn();
  if (status >= 500) {
    const cause = new Error(`the sign-in library answered ${status}: ${said}`);
    return new Refusal('internal', 'Signing in failed on the server; its log says why.', null, cause);
  }
  return new Refusal(
    'bad-input',
    `The sign-in request was refused: ${said === '' ? `status ${status}` : said}.`,
  );
}
