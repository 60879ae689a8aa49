import { createHash } from 'node:crypto';
import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Express } from 'express';
import { pino } from 'pino';
import request from 'supertest';
import type { OpenDatabase } from '../../server/data/client';
import { type AppDeps, createApp } from '../../server/entry/create-app';
import { assemble } from '../../server/entry/start';
import { hashNewPassword } from '../../server/platform/auth';
import { parseConfig } from '../../server/platform/config';
import type { Role } from '../../shared/contracts/http';
import { roles } from '../../shared/contracts/http';
import { makePreset } from './fixtures';

export const origin = 'http://127.0.0.1:4310';
const password = 'a long enough one';

export interface Harness {
  app: Express;
  deps: AppDeps;
  dataDir: string;
  /** Group with one person for each role, and a group of somebody else. */
  group: string;
  otherGroup: string;
  cookies: Record<Role, string>;
  outsider: string;
  logged: string[];
  close(): Promise<void>;
}

export const sampleBytes = Buffer.from('sixteen bytes 01');

/** A project folder with a built page and samples, as far as the server looks at it. */
export function makeRoot(): string {
  const root = mkdtempSync(join(tmpdir(), 'gemel-http-'));
  mkdirSync(join(root, 'dist/client/assets'), { recursive: true });
  mkdirSync(join(root, 'samples/presets'), { recursive: true });
  const page =
    '<!doctype html><html><head><meta name="csp-nonce" nonce=""><title>Gemel</title></head><body></body></html>';
  writeFileSync(join(root, 'dist/client/index.html'), page);
  writeFileSync(join(root, 'dist/client/mark.svg'), '<svg xmlns="http://www.w3.org/2000/svg"/>');
  writeFileSync(join(root, 'dist/client/assets/compute-1a2b.js'), `export const x = 1;${' '.repeat(4000)}`);
  writeFileSync(
    join(root, 'dist/client/assets/kernels-1a2b.wasm'),
    Buffer.from([0, 0x61, 0x73, 0x6d, 1, 0, 0, 0]),
  );
  writeFileSync(join(root, 'samples/delay.bin'), sampleBytes);
  writeFileSync(join(root, 'samples/secret.bin'), 'not in the manifest');
  writeFileSync(join(root, 'samples/presets/delay.json'), JSON.stringify(makePreset('Sample delay')));
  writeFileSync(
    join(root, 'samples/manifest.json'),
    JSON.stringify({
      gemel: 1,
      scenario: 'An invented evening.',
      files: [
        {
          file: 'delay.bin',
          bytes: sampleBytes.length,
          sha256: createHash('sha256').update(sampleBytes).digest('hex'),
          shows: 'Sixteen bytes.',
          seed: 1,
        },
      ],
      presets: [{ preset: 'presets/delay.json', files: { tags: 'delay.bin' } }],
    }),
  );
  return root;
}

export async function openHarness(
  open: () => Promise<OpenDatabase>,
  change: Partial<Pick<AppDeps, 'limits'>> = {},
): Promise<Harness> {
  const root = makeRoot();
  const dataDir = join(root, 'data');
  const database = await open();
  const logged: string[] = [];
  const log = pino({ level: 'debug' }, { write: (line: string) => void logged.push(line) });
  const config = parseConfig({ GEMEL_DATA: dataDir }, { root, development: false });
  const secrets = { session: 'a secret of the tests only, 32 bytes+', demoPassword: 'pair-of-the-tests' };
  const assembled = await assemble(config, { root, version: '0.0.0' }, secrets, database.db, log, () => {});
  const deps: AppDeps = { ...assembled, limits: { failures: 1000, calls: 10_000 }, ...change };
  const app = createApp(deps);
  const { people } = deps;
  const group = await people.createGroup('Test bench', 'test-bench');
  const otherGroup = await people.createGroup('Other bench', 'other-bench');
  const passwordHash = await hashNewPassword(password);
  const cookies: Partial<Record<Role, string>> = {};
  for (const role of roles) {
    const email = `${role}@bench.example`;
    await people.admit({ name: `The ${role}`, email, passwordHash, groupId: group, role });
    cookies[role] = await signIn(app, email, password);
  }
  await people.admit({
    name: 'Outsider',
    email: 'out@bench.example',
    passwordHash,
    groupId: otherGroup,
    role: 'lead',
  });
  const outsider = await signIn(app, 'out@bench.example', password);
  return {
    app,
    deps,
    dataDir,
    group,
    otherGroup,
    cookies: cookies as Record<Role, string>,
    outsider,
    logged,
    async close() {
      await database.close();
      rmSync(root, { recursive: true, force: true });
    },
  };
}

/** The Cookie header of a new session. */
export async function signIn(target: Express | string, email: string, secret: string): Promise<string> {
  const answer = await request(target)
    .post('/api/auth/sign-in/email')
    .set('Origin', origin)
    .send({ email, password: secret });
  if (answer.status !== 200) throw new Error(`sign-in of ${email} answered ${answer.status}: ${answer.text}`);
  return ([answer.headers['set-cookie']].flat() as string[]).map((cookie) => cookie.split(';')[0]).join('; ');
}

export type Method = 'get' | 'post' | 'put' | 'delete';

/** A request as a browser page of this server sends it; `cookie` null for somebody not signed in. */
export function send(
  app: Express | string,
  method: Method,
  path: string,
  cookie: string | null,
  body?: object,
) {
  const call = request(app)[method](path).set('Origin', origin);
  if (cookie !== null) call.set('Cookie', cookie);
  return body === undefined ? call : call.send(body);
}
