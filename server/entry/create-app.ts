import compression from 'compression';
import express, { type Express } from 'express';
import type { Config } from '../platform/config';
import { createHttpLog, type Logger } from '../platform/log';
import { giveNonce, refuseForeignHosts, refuseForeignOrigins, securityHeaders } from '../platform/security';
import { createErrorHandler, refuseUnknown } from '../routes/errors';
import { createGroupRouter } from '../routes/group-routes';
import { createPageRouter } from '../routes/page-routes';
import { createPeopleRouter } from '../routes/people-routes';
import type { RouteDeps } from '../routes/route-deps';
import { createSampleRouter } from '../routes/sample-routes';
import { createSignInRouter, type SignInLimits } from '../routes/sign-in-routes';

export interface AppDeps extends RouteDeps {
  log: Logger;
  proxy: Config['proxy'];
  /** Only this machine can connect. */
  loopback: boolean;
  limits: SignInLimits;
  /** Folder of the built page; null serves the API alone (development). */
  pageDir: string | null;
}

/** The whole server but listening. */
export function createApp(deps: AppDeps): Express {
  const app = express();
  // The address the sign-in limit counts: of the connection, unless a proxy is known to tell the one before it.
  app.set('trust proxy', deps.proxy);
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
  if (deps.loopback) app.use('/api', refuseForeignHosts(deps.trustedOrigins));
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
