import { getMap } from '../domain/results';
import { type GroupRoute, param } from './group-route';

export const mapRoutes: readonly GroupRoute[] = [
  {
    method: 'get',
    path: '/maps/:hash',
    action: 'results.read',
    async handle(deps, member, request, response) {
      const { raw, gzip } = await getMap(deps, member, param(request, 'hash'));
      response.set('Cache-Control', 'private, max-age=31536000, immutable');
      response.vary('Accept-Encoding');
      response.type('json');
      // Stored packed and sent packed, unless the reader cannot unpack.
      if (request.acceptsEncodings('gzip') === 'gzip') response.set('Content-Encoding', 'gzip').send(gzip);
      else response.send(raw);
    },
  },
];
