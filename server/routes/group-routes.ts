import express, { Router } from 'express';
import { type Member, requireAction, requireMember } from '../domain/access';
import type { GroupRoute } from './group-route';
import { mapRoutes } from './map-routes';
import { requirePerson } from './people-routes';
import { presetRoutes } from './preset-routes';
import { resultRoutes } from './result-routes';
import type { RouteDeps } from './route-deps';
import { sessionRoutes } from './session-routes';

export const groupRoutes: readonly GroupRoute[] = [
  ...presetRoutes,
  ...sessionRoutes,
  ...resultRoutes,
  ...mapRoutes,
];

export function createGroupRouter(deps: RouteDeps): Router {
  const router = Router();
  for (const route of groupRoutes) {
    const parse = route.bodyLimit === undefined ? [] : [express.json({ limit: route.bodyLimit })];
    router[route.method](
      `/groups/:groupId${route.path}`,
      async (request, response, next) => {
        const person = await requirePerson(deps, request);
        const member = await requireMember(deps.people, String(request.params.groupId), person.id);
        requireAction(member, route.action);
        response.locals.member = member;
        next();
      },
      ...parse,
      (request, response) => route.handle(deps, response.locals.member as Member, request, response),
    );
  }
  return router;
}
