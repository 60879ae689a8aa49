import { Router } from 'express';
import { findSample, readSamples } from '../domain/samples';
import { param } from './group-route';
import { requirePerson } from './people-routes';
import type { RouteDeps } from './route-deps';

export function createSampleRouter(deps: RouteDeps): Router {
  const router = Router();
  router.get('/samples', async (request, response) => {
    await requirePerson(deps, request);
    response.json(await readSamples(deps.samples));
  });
  router.get('/samples/:file', async (request, response, next) => {
    await requirePerson(deps, request);
    const sample = await findSample(deps.samples, param(request, 'file'));
    response.type('application/octet-stream');
    response.sendFile(
      sample.file,
      {
        root: deps.samples.root,
        dotfiles: 'deny',
        cacheControl: false,
        headers: { 'Cache-Control': 'private, no-cache' },
      },
      (error) => {
        if (error && !response.headersSent) next(error);
      },
    );
  });
  return router;
}
