import compression from 'compression';
import express, { type Express } from 'express';
import { createHttpLog, type Logger } from '../platform/log';
import { giveNonce, refuseForeignOrigins, securityHeaders } from '../platform/security';
import { createErrorHandler, refuseUnknown } from '../routes/errors';
import { createGroupRouter } from '../routes/group-routes';
import { createPageRouter } from '../routes/page-routes';
import { createPeopleRouter } from '../routes/people-routes';
import type { RouteDeps } from '../routes/route-deps';
import { createSampleRouter } from '../routes/sample-routes';
import { createSignInRouter, type SignInLimits } from '../routes/sign-in-routes';

export interface AppDeps extends RouteDeps {
  log: Logger;
  behindProxy: boolean;
  limits: SignInLimits;
  /** Folder of the built page; null serves the API alone (development). */
  pageDir: string | null;
}

/** The whole server but listening. */
export function createApp(deps: AppDeps): Express {
  const app = express();
  // The address a limit counts is told by the proxy, believed only from nearby addresses.
  if (deps.behindProxy) app.set('trust proxy', 'loopback, linklocal, uniquelocal');
  app.use(
    giveNonce,
    securityHeaders(deps.origin.startsWith('https:')),
    createHttpLog(deps.log),
    compression(),
  );
  app.use('/api', (_request, response, next) => {
    response.set('Cache-Control', 'no-store');
    next();
  });
  app.use('/api', refuseForeignOrigins(deps.trustedOrigins));
  app.use(
    '/api',
    createSignInRouter(deps, deps.limits),
    createPeopleRouter(deps),
    createSampleRouter(deps),
    createGroupRouter(deps),
    refuseUnknown,
  );
  if (deps.pageDir !== null) app.use(createPageRouter(deps.pageDir));
  app.use(refuseUnknown);
  app.use(createErrorHandler(deps.log));
  return app;
}
