import { deleteResult, getResult, listResults, saveResult } from '../domain/results';
import { type GroupRoute, param, resultBody } from './group-route';

export const resultRoutes: readonly GroupRoute[] = [
  {
    method: 'get',
    path: '/results',
    action: 'results.read',
    async handle(deps, member, _request, response) {
      response.json({ results: await listResults(deps, member) });
    },
  },
  {
    method: 'post',
    path: '/results',
    action: 'results.write',
    bodyLimit: resultBody,
    async handle(deps, member, request, response) {
      response.status(201).json(await saveResult(deps, member, request.body));
    },
  },
  {
    method: 'get',
    path: '/results/:id',
    action: 'results.read',
    async handle(deps, member, request, response) {
      response.json(await getResult(deps, member, param(request, 'id')));
    },
  },
  {
    method: 'delete',
    path: '/results/:id',
    action: 'results.delete',
    async handle(deps, member, request, response) {
      await deleteResult(deps, member, param(request, 'id'));
      response.status(204).end();
    },
  },
];
