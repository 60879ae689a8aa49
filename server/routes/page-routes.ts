import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import express, { type Request, type Response, Router } from 'express';
import { Refusal, StartProblem } from '../platform/refusal';
import { askedAddress } from './errors';

/** The built page: hashed files for a year, index.html with a new nonce every time. */
export function createPageRouter(folder: string): Router {
  const page = readPage(join(folder, 'index.html'));
  const sendPage = (_request: Request, response: Response): void => {
    response
      .set('Cache-Control', 'no-store')
      .type('html')
      .send(withNonce(page, String(response.locals.nonce)));
  };
  const router = Router();
  router.use(
    '/assets',
    express.static(join(folder, 'assets'), { immutable: true, maxAge: '1y', index: false, redirect: false }),
    (request) => {
      throw new Refusal(
        'not-found',
        `The page has no file ${askedAddress(request)}. It may belong to an earlier version of the page: load the page again.`,
      );
    },
  );
  // Before the static files, which would send the page without its nonce.
  router.get('/index.html', sendPage);
  router.use(express.static(folder, { index: false, redirect: false, maxAge: 0 }));
  router.get(/^\/(?!api\/|api$|assets\/).*/, sendPage);
  return router;
}

function readPage(path: string): string {
  try {
    return readFileSync(path, 'utf8');
  } catch (error) {
    throw new StartProblem(`The page is not built (${path}: ${String(error)}). Run npm run build first.`);
  }
}

/** Replaces the nonce meta element, or adds it as the first of the head. */
export function withNonce(page: string, nonce: string): string {
  const meta = `<meta name="csp-nonce" nonce="${nonce}">`;
  const bare = page.replace(/<meta\s+name="csp-nonce"[^>]*>\s*/i, '');
  return bare.replace(/<head[^>]*>/i, (head) => `${head}\n    ${meta}`);
}
