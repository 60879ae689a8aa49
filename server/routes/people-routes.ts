import { type Request, Router } from 'express';
import type { PersonRecord } from '../data/repositories/people';
import { describeMe } from '../domain/access';
import { Refusal } from '../platform/refusal';
import type { RouteDeps } from './route-deps';

export async function requirePerson(deps: RouteDeps, request: Request): Promise<PersonRecord> {
  const person = await deps.whoIs(request.headers);
  if (person === null)
    throw new Refusal('not-signed-in', 'You are not signed in, or no longer: sign in again.');
  return person;
}

/** Open to all: health and what the sign-in page shows. Signed in: who I am. */
export function createPeopleRouter(deps: RouteDeps): Router {
  const router = Router();
  router.get('/health', async (_request, response) => {
    try {
      await deps.people.ping();
    } catch (error) {
      throw new Refusal(
        'not-ready',
        'The database of this server does not answer now; its log says why.',
        null,
        error,
      );
    }
    response.json({ status: 'ok', version: deps.info.version });
  });
  router.get('/server', (_request, response) => {
    response.json(deps.info);
  });
  router.get('/me', async (request, response) => {
    response.json(await describeMe(deps.people, await requirePerson(deps, request)));
  });
  return router;
}
