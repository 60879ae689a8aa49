import { beforeAll, describe, expect, it } from 'vitest';
import { groupRoutes } from '../../server/routes/group-routes';
import { type Role, roles } from '../../shared/contracts/http';
import { makePreset, makeResult, makeState } from './fixtures';
import { type Harness, type Method, send } from './harness';

/** Who may call what, written by hand from the description of the roles, not from the server's table. */
const expected: Record<string, readonly Role[]> = {
  'get /presets': ['lead', 'analyst', 'runner'],
  'post /presets': ['lead', 'analyst'],
  'get /presets/:id': ['lead', 'analyst', 'runner'],
  'post /presets/:id': ['lead', 'analyst'],
  'get /sessions': ['lead', 'analyst', 'runner'],
  'post /sessions': ['lead', 'analyst', 'runner'],
  'get /sessions/:id': ['lead', 'analyst', 'runner'],
  'put /sessions/:id': ['lead', 'analyst', 'runner'],
  'get /results': ['lead', 'analyst', 'runner', 'guest'],
  'post /results': ['lead', 'analyst', 'runner'],
  'get /results/:id': ['lead', 'analyst', 'runner', 'guest'],
  'delete /results/:id': ['lead', 'analyst'],
  'get /maps/:hash': ['lead', 'analyst', 'runner', 'guest'],
};

interface Objects {
  preset: string;
  sessions: Record<string, string>;
  results: Record<string, string>;
  hash: string;
}

async function created(h: Harness, path: string, cookie: string, body: object): Promise<string> {
  const answer = await send(h.app, 'post', `/api/groups/${h.group}${path}`, cookie, body);
  expect(answer.status, answer.text).toBe(201);
  return answer.body.id;
}

/** Own objects of everybody who may have them; a guest asks for the lead's. */
async function makeObjects(h: Harness): Promise<Objects> {
  const lead = h.cookies.lead;
  const sessions: Record<string, string> = {};
  const results: Record<string, string> = {};
  for (const role of ['lead', 'analyst', 'runner'] as const) {
    sessions[role] = await created(h, '/sessions', h.cookies[role], { name: role, state: makeState() });
    results[role] = await created(h, '/results', h.cookies[role], { name: role, result: makeResult() });
  }
  sessions.guest = sessions.lead!;
  results.guest = results.lead!;
  const row = await send(h.app, 'get', `/api/groups/${h.group}/results/${results.lead}`, lead);
  const hash = String(row.body.result.maps['joint.x'].file).split('/').pop()!;
  return { preset: await created(h, '/presets', lead, { preset: makePreset() }), sessions, results, hash };
}

function fill(path: string, role: Role, objects: Objects): string {
  const id = path.startsWith('/presets')
    ? objects.preset
    : path.startsWith('/sessions')
      ? objects.sessions[role]!
      : objects.results[role]!;
  return path.replace(':id', id).replace(':hash', objects.hash);
}

function bodyFor(method: Method, path: string): object | undefined {
  if (method === 'get' || method === 'delete') return undefined;
  if (path.startsWith('/presets')) return { preset: makePreset() };
  if (path.startsWith('/sessions')) return { name: 'again', state: makeState() };
  return { name: 'again', result: makeResult() };
}

export function roleMatrix(harness: () => Harness): void {
  describe('every route, every role', () => {
    let objects: Objects;
    beforeAll(async () => {
      objects = await makeObjects(harness());
    });

    it('names every route of the server', () => {
      const routes = groupRoutes.map((route) => `${route.method} ${route.path}`);
      expect(routes.sort()).toEqual(Object.keys(expected).sort());
    });

    // Deletes come last, so that what the others ask for is still there.
    const ordered = Object.entries(expected).sort(
      ([a], [b]) => Number(a.startsWith('delete')) - Number(b.startsWith('delete')),
    );
    for (const [route, allowed] of ordered) {
      const [method, path] = route.split(' ') as [Method, string];
      it(`${route}: 401 signed out, 404 from another group`, async () => {
        const h = harness();
        const url = `/api/groups/${h.group}${fill(path, 'lead', objects)}`;
        const out = await send(h.app, method, url, null, bodyFor(method, path));
        expect([out.status, out.body.error.code]).toEqual([401, 'not-signed-in']);
        const other = await send(h.app, method, url, h.outsider, bodyFor(method, path));
        expect([other.status, other.body.error.code]).toEqual([404, 'not-found']);
        const none = await send(
          h.app,
          method,
          url.replace(h.group, 'nowhere'),
          h.outsider,
          bodyFor(method, path),
        );
        // Word for word the same, so that nobody learns which groups exist.
        expect(none.body).toEqual(other.body);
      });

      it(`${route}: an object of this group is not found through another`, async () => {
        if (!path.includes(':')) return;
        const h = harness();
        const url = `/api/groups/${h.otherGroup}${fill(path, 'lead', objects)}`;
        const answer = await send(h.app, method, url, h.outsider, bodyFor(method, path));
        expect(answer.status, answer.text).toBe(404);
      });

      for (const role of roles.toReversed()) {
        const may = allowed.includes(role);
        it(`${route}: ${role} ${may ? 'may' : 'may not'}`, async () => {
          const h = harness();
          const url = `/api/groups/${h.group}${fill(path, role, objects)}`;
          const answer = await send(h.app, method, url, h.cookies[role], bodyFor(method, path));
          if (may) expect(answer.status, answer.text).toBeLessThan(300);
          else expect([answer.status, answer.body.error.code]).toEqual([403, 'not-allowed']);
        });
      }
    }
  });
}
