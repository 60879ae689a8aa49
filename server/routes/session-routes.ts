import { changeSession, createSession, getSession, listSessions } from '../domain/sessions';
import { type GroupRoute, param, smallBody } from './group-route';

export const sessionRoutes: readonly GroupRoute[] = [
  {
    method: 'get',
    path: '/sessions',
    action: 'sessions.use',
    async handle({ sessions }, member, _request, response) {
      response.json({ sessions: await listSessions(sessions, member) });
    },
  },
  {
    method: 'post',
    path: '/sessions',
    action: 'sessions.use',
    bodyLimit: smallBody,
    async handle({ sessions }, member, request, response) {
      response.status(201).json(await createSession(sessions, member, request.body));
    },
  },
  {
    method: 'get',
    path: '/sessions/:id',
    action: 'sessions.use',
    async handle({ sessions }, member, request, response) {
      response.json(await getSession(sessions, member, param(request, 'id')));
    },
  },
  {
    method: 'put',
    path: '/sessions/:id',
    action: 'sessions.use',
    bodyLimit: smallBody,
    async handle({ sessions }, member, request, response) {
      response.json(await changeSession(sessions, member, param(request, 'id'), request.body));
    },
  },
];
