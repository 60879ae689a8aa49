import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { gunzipSync } from 'node:zlib';
import request from 'supertest';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import type { OpenDatabase } from '../../server/data/client';
import { hashNewPassword } from '../../server/platform/auth';
import {
  errorBodySchema,
  meSchema,
  presetListSchema,
  presetRowSchema,
  resultListSchema,
  resultRowSchema,
  resultSummarySchema,
  samplesSchema,
  serverInfoSchema,
  sessionListSchema,
  sessionRowSchema,
} from '../../shared/contracts/http';
import { float64Base64, hardNumbers, makeMap, makePreset, makeResult, makeState } from './fixtures';
import { type Harness, openHarness, origin, sampleBytes, send, signIn } from './harness';
import { roleMatrix } from './role-matrix';

/** The whole API against one database; the same for the embedded one and for PostgreSQL. */
export function apiSuite(name: string, open: () => Promise<OpenDatabase>): void {
  describe(name, () => {
    let h: Harness;
    beforeAll(async () => {
      h = await openHarness(open);
    });
    afterAll(async () => {
      await h?.close();
    });
    const harness = () => h;
    signingIn(harness);
    samples(harness);
    presets(harness);
    sessions(harness);
    results(harness);
    refusals(harness);
    roleMatrix(harness);
  });
}

function signingIn(harness: () => Harness): void {
  describe('signing in', () => {
    it('tells health and the demo sign-in to everybody', async () => {
      const { app } = harness();
      expect((await request(app).get('/api/health')).body).toEqual({ status: 'ok', version: '0.0.0' });
      const info = serverInfoSchema.parse((await request(app).get('/api/server')).body);
      expect(info.demo).toEqual({ email: 'lead@demo.gemel', password: 'pair-of-the-tests' });
      expect(await signIn(app, info.demo!.email, info.demo!.password)).toContain('gemel.session_token=');
    });

    it('knows the person and the groups, and forgets them on sign-out', async () => {
      const { app, group } = harness();
      const cookie = await signIn(app, 'analyst@bench.example', 'a long enough one');
      const me = meSchema.parse((await send(app, 'get', '/api/me', cookie)).body);
      expect(me.groups).toEqual([{ id: group, name: 'Test bench', role: 'analyst' }]);
      expect((await send(app, 'post', '/api/auth/sign-out', cookie, {})).status).toBe(200);
      expect((await send(app, 'get', '/api/me', cookie)).status).toBe(401);
    });

    it('sets a cookie scripts cannot read', async () => {
      const answer = await request(harness().app)
        .post('/api/auth/sign-in/email')
        .set('Origin', origin)
        .send({ email: 'guest@bench.example', password: 'a long enough one' });
      const cookie = String(answer.headers['set-cookie']);
      expect(cookie).toMatch(/HttpOnly/);
      expect(cookie).toMatch(/SameSite=Lax/);
      expect(cookie).not.toMatch(/Secure/);
    });

    it('never gives the session token to a script', async () => {
      const { app, deps } = harness();
      const groupId = await deps.people.createGroup('Token bench', 'token-bench');
      const passwordHash = await hashNewPassword('a long enough one');
      const email = 'token@bench.example';
      await deps.people.admit({ name: 'Token', email, passwordHash, groupId, role: 'guest' });
      const post = (path: string, cookie: string | null, body: object) =>
        send(app, 'post', `/api/auth/${path}`, cookie, body);
      const entered = await post('sign-in/email', null, { email, password: 'a long enough one' });
      expect([entered.status, entered.text]).toEqual([200, '{}']);
      const cookie = String(entered.headers['set-cookie']).split(';')[0]!;
      expect((await send(app, 'get', '/api/auth/get-session', cookie)).status).toBe(404);
      const change = {
        currentPassword: 'a long enough one',
        newPassword: 'another long one',
        revokeOtherSessions: true,
      };
      const out = await post('change-password', null, change);
      expect([out.status, out.body.error.code]).toEqual([401, 'not-signed-in']);
      const wrong = await post('change-password', cookie, { ...change, currentPassword: 'not this one' });
      expect([wrong.status, wrong.body.error.message]).toEqual([
        400,
        expect.stringMatching(/invalid password/i),
      ]);
      const changed = await post('change-password', cookie, change);
      expect([changed.status, changed.text]).toEqual([200, '{}']);
      expect((await send(app, 'get', '/api/me', cookie)).status).toBe(401);
      const renewed = String(changed.headers['set-cookie']).split(';')[0]!;
      expect((await send(app, 'get', '/api/me', renewed)).status).toBe(200);
      const left = await post('sign-out', renewed, {});
      expect([left.status, left.text]).toEqual([200, '{}']);
    });

    it('answers this machine by its own names only', async () => {
      const { app } = harness();
      const ask = (host: string) => request(app).get('/api/server').set('Host', host);
      for (const host of ['127.0.0.1:4310', 'localhost:4310', 'LOCALHOST', '[::1]:4310']) {
        expect([host, (await ask(host)).status]).toEqual([host, 200]);
      }
      for (const host of [
        'elsewhere.example:4310',
        '127.0.0.1.elsewhere.example',
        'localhost@elsewhere',
        '[::2]:1',
      ]) {
        const answer = await ask(host);
        expect([host, answer.status, answer.body.error?.code]).toEqual([host, 403, 'foreign-host']);
        expect(answer.text).not.toContain('pair-of-the-tests');
      }
      const demo = { email: 'lead@demo.gemel', password: 'pair-of-the-tests' };
      const planted = send(app, 'post', '/api/auth/sign-in/email', null, demo).set(
        'Host',
        'elsewhere.example',
      );
      expect((await planted).status).toBe(403);
    });

    it('refuses a wrong password, a foreign page, a forged cookie and signing up', async () => {
      const { app } = harness();
      const wrong = await send(app, 'post', '/api/auth/sign-in/email', null, {
        email: 'lead@bench.example',
        password: 'not this one',
      });
      expect([wrong.status, wrong.body.error.code]).toEqual([401, 'wrong-sign-in']);
      const foreign = await request(app)
        .post('/api/auth/sign-in/email')
        .set('Origin', 'https://elsewhere.example')
        .send({ email: 'lead@bench.example', password: 'a long enough one' });
      expect([foreign.status, foreign.body.error.code]).toEqual([403, 'foreign-origin']);
      expect((await send(app, 'get', '/api/me', 'gemel.session_token=abc.def')).status).toBe(401);
      const up = await send(app, 'post', '/api/auth/sign-up/email', null, {
        email: 'new@bench.example',
        password: 'a long enough one',
        name: 'New',
      });
      expect(up.status).toBe(404);
    });
  });
}

function samples(harness: () => Harness): void {
  describe('samples', () => {
    it('are listed with their presets and streamed to signed-in people only', async () => {
      const { app, cookies } = harness();
      expect((await send(app, 'get', '/api/samples', null)).status).toBe(401);
      expect((await send(app, 'get', '/api/samples/delay.bin', null)).status).toBe(401);
      const list = samplesSchema.parse((await send(app, 'get', '/api/samples', cookies.guest)).body);
      expect(list.presets[0]).toMatchObject({
        preset: { name: 'Sample delay' },
        files: { tags: 'delay.bin' },
      });
      const file = await send(app, 'get', '/api/samples/delay.bin', cookies.runner);
      expect(file.status).toBe(200);
      expect(Buffer.from(file.body)).toEqual(sampleBytes);
    });

    it('are only the files of the manifest', async () => {
      const { app, cookies } = harness();
      for (const name of ['secret.bin', 'manifest.json', '..%2Fpackage.json', '%2Fetc%2Fpasswd', '%00']) {
        const answer = await send(app, 'get', `/api/samples/${name}`, cookies.lead);
        expect([name, answer.status]).toEqual([name, 404]);
      }
    });

    it('gave the demo group its presets', async () => {
      const { app } = harness();
      const cookie = await signIn(app, 'runner@demo.gemel', 'pair-of-the-tests');
      const me = meSchema.parse((await send(app, 'get', '/api/me', cookie)).body);
      expect(me.groups.map((group) => [group.name, group.role])).toEqual([
        ['Lanternfield pair bench', 'runner'],
      ]);
      const list = presetListSchema.parse(
        (await send(app, 'get', `/api/groups/${me.groups[0]!.id}/presets`, cookie)).body,
      );
      expect(list.presets.map((row) => row.name)).toEqual(['Sample delay']);
    });
  });
}

function presets(harness: () => Harness): void {
  describe('presets', () => {
    it('get numbered versions that never change', async () => {
      const { app, cookies, group } = harness();
      const base = `/api/groups/${group}/presets`;
      const first = presetRowSchema.parse(
        (await send(app, 'post', base, cookies.analyst, { preset: makePreset('Morning') })).body,
      );
      expect([first.version, first.by]).toEqual([1, 'The analyst']);
      const next = { ...makePreset('Morning, wider'), dials: { window: 1e-300 } };
      const second = presetRowSchema.parse(
        (await send(app, 'post', `${base}/${first.id}`, cookies.lead, { preset: next })).body,
      );
      expect([second.id, second.version, second.by, second.preset.dials.window]).toEqual([
        first.id,
        2,
        'The lead',
        1e-300,
      ]);
      const old = await send(app, 'get', `${base}/${first.id}?version=1`, cookies.runner);
      expect(old.body.preset).toEqual(first.preset);
      expect((await send(app, 'get', `${base}/${first.id}?version=3`, cookies.runner)).status).toBe(404);
      const list = presetListSchema.parse((await send(app, 'get', base, cookies.runner)).body);
      expect(list.presets.filter((row) => row.id === first.id).map((row) => row.version)).toEqual([2]);
    });

    it('give two writers at once two numbers', async () => {
      const { app, cookies, group } = harness();
      const base = `/api/groups/${group}/presets`;
      const { id } = (await send(app, 'post', base, cookies.lead, { preset: makePreset() })).body;
      const answers = await Promise.all(
        Array.from({ length: 8 }, () =>
          send(app, 'post', `${base}/${id}`, cookies.lead, { preset: makePreset() }),
        ),
      );
      expect(answers.map((answer) => answer.body.version).sort()).toEqual([2, 3, 4, 5, 6, 7, 8, 9]);
    });

    it('stay with their study', async () => {
      const { app, cookies, group } = harness();
      const base = `/api/groups/${group}/presets`;
      const { id } = (await send(app, 'post', base, cookies.lead, { preset: makePreset() })).body;
      const other = { ...makePreset(), study: 'witness' };
      const answer = await send(app, 'post', `${base}/${id}`, cookies.lead, { preset: other });
      expect([answer.status, answer.body.error.place]).toEqual([400, 'preset.study']);
    });
  });
}

function sessions(harness: () => Harness): void {
  it('sessions belong to their maker, even before a lead', async () => {
    const { app, cookies, group } = harness();
    const base = `/api/groups/${group}/sessions`;
    const write = { name: 'Tuesday', state: makeState() };
    const row = sessionRowSchema.parse((await send(app, 'post', base, cookies.runner, write)).body);
    expect(row.state).toEqual(write.state);
    const changed = { name: 'Tuesday, late', state: { ...makeState(), seed: 2 ** 40 } };
    const put = sessionRowSchema.parse(
      (await send(app, 'put', `${base}/${row.id}`, cookies.runner, changed)).body,
    );
    expect([put.id, put.name, put.state.seed]).toEqual([row.id, 'Tuesday, late', 2 ** 40]);
    for (const cookie of [cookies.lead, cookies.analyst]) {
      expect((await send(app, 'get', `${base}/${row.id}`, cookie)).status).toBe(404);
      expect((await send(app, 'put', `${base}/${row.id}`, cookie, write)).status).toBe(404);
      const list = sessionListSchema.parse((await send(app, 'get', base, cookie)).body);
      expect(list.sessions.map((session) => session.id)).not.toContain(row.id);
    }
    const kept = await send(app, 'get', `${base}/${row.id}`, cookies.runner);
    expect(sessionRowSchema.parse(kept.body)).toEqual(put);
  });
}

function results(harness: () => Harness): void {
  const save = async (maps = { 'joint.x': makeMap() }) => {
    const { app, cookies, group } = harness();
    const body = { name: 'Run', result: makeResult(maps) };
    const answer = await send(app, 'post', `/api/groups/${group}/results`, cookies.runner, body);
    expect(answer.status, answer.text).toBe(201);
    return resultSummarySchema.parse(answer.body);
  };
  const fileOf = (address: string) => {
    const hash = address.split('/').pop()!;
    return join(harness().dataDir, 'maps', hash.slice(0, 2), `${hash}.gz`);
  };
  const read = async (id: string) => {
    const { app, cookies, group } = harness();
    return resultRowSchema.parse(
      (await send(app, 'get', `/api/groups/${group}/results/${id}`, cookies.guest)).body,
    );
  };

  describe('results', () => {
    it('keep every double, the order of quantities, and the bytes of maps', async () => {
      const { app, cookies } = harness();
      const summary = await save();
      const row = await read(summary.id);
      const sent = makeResult();
      expect(Object.keys(row.result.quantities)).toEqual(Object.keys(sent.quantities));
      for (const [id, value] of Object.entries(hardNumbers)) {
        expect(Object.is(row.result.quantities[id]?.value, value), id).toBe(true);
        expect(Object.is(row.result.quantities[id]?.sigma, Math.abs(value) / 3), id).toBe(true);
      }
      expect({ ...row.result, maps: {} }).toEqual({ ...sent, maps: {} });
      const head = row.result.maps['joint.x']!;
      expect([head.data, head.sigma, head.masked, head.shape]).toEqual([
        undefined,
        undefined,
        undefined,
        [2, 2],
      ]);
      const map = await send(app, 'get', head.file!, cookies.guest);
      expect(map.body).toEqual(sent.maps['joint.x']);
      expect(map.headers['cache-control']).toBe('private, max-age=31536000, immutable');
      const plain = await send(app, 'get', head.file!, cookies.guest).set('Accept-Encoding', 'identity');
      expect([plain.headers['content-encoding'], plain.body]).toEqual([undefined, map.body]);
    });

    it('are listed with up to three quantities, the asked ones first', async () => {
      const { app, cookies, group } = harness();
      const summary = await save();
      expect(summary.headline.map((entry) => entry.id)).toEqual(['car', 'sum', 'tiny']);
      const list = resultListSchema.parse(
        (await send(app, 'get', `/api/groups/${group}/results`, cookies.guest)).body,
      );
      expect(list.results[0]).toEqual(summary);
    });

    it('take a map of 8 MB of numbers and keep equal maps once', async () => {
      const values = Array.from({ length: 1024 * 1024 }, (_, k) => Math.sin(k));
      const big = { ...makeMap([1, 2]), shape: [1024, 1024], data: float64Base64(values) };
      const map = { ...big, masked: undefined, sigma: undefined };
      const summary = await save({ 'joint.x': map });
      const again = await save({ 'joint.x': map });
      const [one, two] = [await read(summary.id), await read(again.id)];
      expect(one.result.maps['joint.x']!.file).toBe(two.result.maps['joint.x']!.file);
      const stored = JSON.parse(
        gunzipSync(readFileSync(fileOf(one.result.maps['joint.x']!.file!))).toString(),
      );
      expect(stored.data).toBe(big.data);
    });

    it('write the maps before the row that names them', async () => {
      const { deps } = harness();
      const seen: boolean[] = [];
      const insert = deps.results.insert;
      const spy = vi.spyOn(deps.results, 'insert').mockImplementation((entry) => {
        for (const map of entry.maps) seen.push(existsSync(fileOf(map.hash)));
        return insert(entry);
      });
      await save({ 'joint.x': makeMap([11, 12, 13, 14]), 'joint.y': makeMap([15, 16]) } as never);
      spy.mockRestore();
      expect(seen).toEqual([true, true]);
    });

    it('leave no row behind when a map cannot be written', async () => {
      const { app, cookies, deps, group } = harness();
      const spy = vi.spyOn(deps.maps, 'write').mockRejectedValue(new Error('disk full'));
      const answer = await send(app, 'post', `/api/groups/${group}/results`, cookies.lead, {
        name: 'never stored',
        result: makeResult(),
      });
      spy.mockRestore();
      expect([answer.status, answer.body.error.code]).toEqual([500, 'internal']);
      expect(answer.text).not.toContain('disk full');
      const list = await send(app, 'get', `/api/groups/${group}/results`, cookies.lead);
      expect(list.text).not.toContain('never stored');
    });

    it('notice a damaged map', async () => {
      const { app, cookies } = harness();
      const row = await read((await save({ 'joint.x': makeMap([21, 22, 23, 24]) })).id);
      const address = row.result.maps['joint.x']!.file!;
      writeFileSync(fileOf(address), 'not gzip');
      const answer = await send(app, 'get', address, cookies.lead);
      expect(answer.status).toBe(500);
      expect(answer.body.error.message).toContain('missing or damaged');
      expect(answer.headers['cache-control']).toBe('no-store');
      // Saving the same map again repairs it.
      await save({ 'joint.x': makeMap([21, 22, 23, 24]) });
      expect((await send(app, 'get', address, cookies.lead)).status).toBe(200);
    });

    it('are deleted by their maker or a lead, with the maps nobody else names', async () => {
      const { app, cookies, group } = harness();
      const url = (id: string) => `/api/groups/${group}/results/${id}`;
      const shared = makeMap([31, 32, 33, 34]);
      const first = await read((await save({ 'joint.x': shared })).id);
      const second = await read((await save({ 'joint.x': shared })).id);
      const address = first.result.maps['joint.x']!.file!;
      expect((await send(app, 'delete', url(first.id), cookies.analyst)).status).toBe(403);
      expect((await send(app, 'delete', url(first.id), cookies.lead)).status).toBe(204);
      expect((await send(app, 'get', url(first.id), cookies.lead)).status).toBe(404);
      expect((await send(app, 'get', address, cookies.lead)).status).toBe(200);
      expect((await send(app, 'delete', url(second.id), cookies.lead)).status).toBe(204);
      expect((await send(app, 'get', address, cookies.lead)).status).toBe(404);
      expect(existsSync(fileOf(address))).toBe(false);
    });

    it('refuse more names, and longer ones, than any study gives', async () => {
      const { app, cookies, group } = harness();
      const numbers = (count: number) =>
        Object.fromEntries(Array.from({ length: count }, (_, k) => [`w${k}`, k]));
      const post = (chosen: Record<string, number>) =>
        send(app, 'post', `/api/groups/${group}/results`, cookies.lead, {
          name: 'x',
          result: { ...makeResult({}), chosen },
        });
      expect((await post(numbers(2000))).status).toBe(201);
      const many = await post(numbers(2001));
      expect([many.status, many.body.error.place]).toEqual([400, 'result.chosen']);
      expect(many.body.error.message).toContain('more than 2000 entries');
      expect((await post({ ['n'.repeat(200)]: 1 })).status).toBe(201);
      const long = await post({ ['n'.repeat(201)]: 1 });
      expect(long.status).toBe(400);
      expect(long.body.error.message).toContain('a name is longer than 200 characters');
    });

    it('refuse maps whose arrays do not fit their shape', async () => {
      const { app, cookies, group } = harness();
      const bad = {
        'result.maps.m.data': { ...makeMap(), data: float64Base64([1, 2, 3]) },
        'result.maps.m.masked': { ...makeMap(), masked: 'AAA=' },
        'result.maps.m.axes': { ...makeMap(), axes: makeMap().axes.slice(1) },
        'result.maps.m': { ...makeMap(), data: undefined, file: 'm.npy' },
      };
      for (const [place, m] of Object.entries(bad)) {
        const body = { name: 'x', result: makeResult({ m }) };
        const answer = await send(app, 'post', `/api/groups/${group}/results`, cookies.lead, body);
        expect([answer.status, answer.body.error.place]).toEqual([400, place]);
      }
    });
  });
}

function refusals(harness: () => Harness): void {
  describe('refusals', () => {
    const post = (path: string, type: string, text: string) => {
      const { app, cookies, group } = harness();
      return request(app)
        .post(`/api/groups/${group}${path}`)
        .set('Origin', origin)
        .set('Cookie', cookies.lead)
        .set('Content-Type', type)
        .send(text);
    };

    it('have one shape and a sentence', async () => {
      const { app, cookies, group } = harness();
      const answers = [
        [400, 'malformed-json', await post('/presets', 'application/json', '{"preset":')],
        [415, 'not-json', await post('/presets', 'text/plain', 'hello')],
        [
          413,
          'too-large',
          await post('/presets', 'application/json', `{"preset":"${'x'.repeat(1_100_000)}"}`),
        ],
        [
          413,
          'too-large',
          await post('/results', 'application/json', `{"name":"${'x'.repeat(65 * 1024 * 1024)}"}`),
        ],
        [
          400,
          'bad-input',
          await post('/presets', 'application/json', '{"preset":{"gemel":1,"kind":"other"}}'),
        ],
        [400, 'newer-version', await post('/presets', 'application/json', '{"preset":{"gemel":2}}')],
        [
          400,
          'bad-input',
          await post('/sessions', 'application/json', JSON.stringify({ name: '\u0000', state: makeState() })),
        ],
        [404, 'not-found', await send(app, 'get', '/api/nothing', cookies.lead)],
        [404, 'not-found', await send(app, 'get', `/api/groups/${group}/presets/%00`, cookies.lead)],
        [404, 'not-found', await send(app, 'get', `/api/groups/%00/presets`, cookies.lead)],
        [400, 'bad-input', await send(app, 'get', `/api/groups/${group}/presets/%E0%A4%A`, cookies.lead)],
      ] as const;
      for (const [status, code, answer] of answers) {
        const { error } = errorBodySchema.parse(answer.body);
        expect([answer.status, error.code]).toEqual([status, code]);
        expect(error.message).toMatch(/^[A-Z].*\.$/s);
      }
    });

    it('come before the body is read when somebody may not', async () => {
      const { app, cookies, group } = harness();
      const answer = await send(app, 'post', `/api/groups/${group}/results`, cookies.guest)
        .type('json')
        .send('{"broken');
      expect(answer.status).toBe(403);
    });

    it('of a foreign page change nothing', async () => {
      const { app, cookies, group } = harness();
      const answer = await request(app)
        .post(`/api/groups/${group}/presets`)
        .set('Origin', 'https://elsewhere.example')
        .set('Cookie', cookies.lead)
        .send({ preset: makePreset('planted') });
      expect([answer.status, answer.body.error.code]).toEqual([403, 'foreign-origin']);
    });

    it('and requests leave neither bodies nor cookies nor queries in the log', async () => {
      const { app, cookies, group, logged } = harness();
      await send(app, 'get', `/api/groups/${group}/presets?version=hidden-query`, cookies.lead);
      const text = logged.join('');
      expect(text).toContain(`/api/groups/${group}/presets`);
      for (const secret of [
        'hidden-query',
        'session_token',
        'a long enough one',
        cookies.lead.split('=')[1]!,
      ]) {
        expect(text.includes(secret), secret).toBe(false);
      }
    });
  });
}
