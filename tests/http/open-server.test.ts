import { rmSync } from 'node:fs';
import { join } from 'node:path';
import type { Express } from 'express';
import { pino } from 'pino';
import request from 'supertest';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import { type OpenDatabase, openEmbedded } from '../../server/data/client';
import { createApp } from '../../server/entry/create-app';
import { assemble } from '../../server/entry/start';
import { parseConfig } from '../../server/platform/config';
import { createLog } from '../../server/platform/log';
import { makeRoot, signIn } from './harness';

const publicOrigin = 'http://bench.example';
const secrets = { session: 'a secret of the tests only, 32 bytes+', demoPassword: 'pair-of-the-tests' };

describe('a server others can reach', () => {
  const root = makeRoot();
  let database: OpenDatabase;
  beforeAll(async () => {
    database = await openEmbedded(null);
  });
  afterAll(async () => {
    await database?.close();
    rmSync(root, { recursive: true, force: true });
  });

  const begin = async (environment: Record<string, string>): Promise<{ app: Express; said: string[] }> => {
    const said: string[] = [];
    const config = parseConfig(
      { GEMEL_DATA: join(root, 'data'), ...environment },
      { root, development: false },
    );
    const log = pino({ level: 'silent' });
    const say = (line: string) => void said.push(line);
    const deps = await assemble(config, { root, version: '0.0.0' }, secrets, database.db, log, say);
    return { app: createApp(deps), said };
  };
  const open = { HOST: '0.0.0.0', GEMEL_ORIGIN: publicOrigin };
  const enter = (app: Express, email: string, password: string) =>
    request(app).post('/api/auth/sign-in/email').set('Origin', publicOrigin).send({ email, password });

  it('says that nobody leads it, also when demo people are in the database', async () => {
    expect((await begin(open)).said).toEqual([
      expect.stringMatching(/^Nobody leads .* set GEMEL_LEAD_EMAIL /),
    ]);
    await begin({});
    expect((await begin(open)).said).toEqual([
      expect.stringMatching(/^Nobody leads .* set GEMEL_LEAD_EMAIL /),
    ]);
  });

  it('keeps the demo people out while another server on its database has the demo open', async () => {
    const { app } = await begin(open);
    const near = await begin({});
    const cookie = await signIn(near.app, 'lead@demo.gemel', secrets.demoPassword);
    expect((await request(near.app).get('/api/me').set('Cookie', cookie)).status).toBe(200);
    for (const email of ['lead@demo.gemel', 'Guest@Demo.Gemel', ' lead@demo.gemel']) {
      const answer = await enter(app, email, secrets.demoPassword);
      expect([email, answer.status, answer.body.error.code]).toEqual([email, 401, 'wrong-sign-in']);
    }
    expect((await request(app).get('/api/me').set('Cookie', cookie)).status).toBe(401);
    const change = { currentPassword: secrets.demoPassword, newPassword: 'another long one' };
    const changed = await request(app)
      .post('/api/auth/change-password')
      .set('Origin', publicOrigin)
      .set('Cookie', cookie)
      .send(change);
    expect([changed.status, changed.body.error.code]).toEqual([401, 'not-signed-in']);
  });

  it('gives its first lead a group of its own, named by GEMEL_GROUP, and is then content', async () => {
    const lead = { ...open, GEMEL_LEAD_EMAIL: 'first@bench.example', GEMEL_GROUP: 'North laboratory' };
    const { app, said } = await begin(lead);
    const password = /password: (\S+)/.exec(said.join('\n'))?.[1] ?? '';
    const answer = await enter(app, 'first@bench.example', password);
    const cookie = String(answer.headers['set-cookie']).split(';')[0]!;
    const me = await request(app).get('/api/me').set('Cookie', cookie);
    expect(me.body.groups).toMatchObject([{ name: 'North laboratory', role: 'lead' }]);
    expect((await begin(open)).said).toEqual([]);
    // The demo on the same database stays in its own group.
    const near = await begin({});
    const demo = await signIn(near.app, 'lead@demo.gemel', secrets.demoPassword);
    const groups = (await request(near.app).get('/api/me').set('Cookie', demo)).body.groups;
    expect(groups).toMatchObject([{ name: 'Lanternfield pair bench' }]);
  });

  it('tells strangers nothing of a failing database, and the log everything but the values', async () => {
    const lines: string[] = [];
    const printed = vi
      .spyOn(console, 'error')
      .mockImplementation((...all) => void lines.push(all.map(String).join(' ')));
    const failing = await openEmbedded(null);
    const config = parseConfig({ GEMEL_DATA: join(root, 'data') }, { root, development: false });
    const log = createLog('info', { write: (line) => void lines.push(line) });
    const app = createApp(
      await assemble(config, { root, version: '0.0.0' }, secrets, failing.db, log, () => {}),
    );
    await failing.close();
    const health = await request(app).get('/api/health');
    expect([health.status, health.body.error]).toEqual([
      503,
      {
        code: 'not-ready',
        message: 'The database of this server does not answer now; its log says why.',
        place: null,
      },
    ]);
    const entered = await request(app)
      .post('/api/auth/sign-in/email')
      .set('Origin', 'http://127.0.0.1:4310')
      .send({ email: 'someone@bench.example', password: 'a long enough one' });
    expect([entered.status, entered.body.error.code]).toEqual([500, 'internal']);
    printed.mockRestore();
    const text = lines.join('\n');
    expect(text.match(/PGlite is closed/g)?.length).toBeGreaterThanOrEqual(2);
    expect(text).not.toMatch(/someone@bench|params|a long enough one/);
  });

  it('tells how to count attempts behind a proxy', async () => {
    const behind = { GEMEL_ORIGIN: 'https://gemel.example' };
    expect((await begin(behind)).said).toEqual([expect.stringContaining('set GEMEL_PROXY=loopback')]);
    expect((await begin({ ...behind, GEMEL_PROXY: 'loopback' })).said).toEqual([]);
  });
});
