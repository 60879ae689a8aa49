import { type ChildProcess, spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { createServer } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { makePreset } from './fixtures';
import { send } from './harness';

const root = fileURLToPath(new URL('../../', import.meta.url));
const pageOrigin = 'http://127.0.0.1:5173';

interface Started {
  child: ChildProcess;
  url: string;
  output(): string;
  ended: Promise<{ code: number | null; signal: string | null }>;
}

async function freePort(): Promise<number> {
  return new Promise((resolve) => {
    const probe = createServer().listen(0, '127.0.0.1', () => {
      const address = probe.address();
      probe.close(() => resolve(typeof address === 'object' && address !== null ? address.port : 0));
    });
  });
}

/** The real program, from source, on a data directory and a free port. */
async function launch(dataDir: string, more: Record<string, string> = {}): Promise<Started> {
  const port = await freePort();
  const child = spawn(process.execPath, ['--import', 'tsx', 'server/entry/main.ts'], {
    cwd: root,
    env: {
      PATH: process.env.PATH,
      GEMEL_DATA: dataDir,
      GEMEL_API_PORT: String(port),
      GEMEL_LOG: 'error',
      ...more,
    },
  });
  let output = '';
  child.stdout.on('data', (chunk: Buffer) => (output += chunk.toString()));
  child.stderr.on('data', (chunk: Buffer) => (output += chunk.toString()));
  const ended = new Promise<{ code: number | null; signal: string | null }>((resolve) =>
    child.once('exit', (code, signal) => resolve({ code, signal })),
  );
  return { child, url: `http://127.0.0.1:${port}`, output: () => output, ended };
}

async function ready(started: Started): Promise<void> {
  let over = false;
  void started.ended.then(() => {
    over = true;
  });
  while (!started.output().includes('is ready at')) {
    if (over) throw new Error(`the server ended: ${started.output()}`);
    await new Promise((resolve) => setTimeout(resolve, 50));
  }
}

/** Signs in as the demo lead; answers the cookie and the group. */
async function enter(started: Started): Promise<{ cookie: string; base: string }> {
  const info = (await (await fetch(`${started.url}/api/server`)).json()) as {
    demo: { email: string; password: string };
  };
  expect(started.output()).toContain(info.demo.password);
  const answer = await fetch(`${started.url}/api/auth/sign-in/email`, {
    method: 'POST',
    headers: { 'content-type': 'application/json', origin: pageOrigin },
    body: JSON.stringify(info.demo),
  });
  const cookie = answer.headers.getSetCookie()[0]!.split(';')[0]!;
  const me = await send(started.url, 'get', '/api/me', cookie);
  return { cookie, base: `/api/groups/${me.body.groups[0].id}` };
}

async function store(started: Started, cookie: string, base: string, name: string): Promise<void> {
  const answer = await send(started.url, 'post', `${base}/presets`, cookie, { preset: makePreset(name) }).set(
    'Origin',
    pageOrigin,
  );
  expect(answer.status).toBe(201);
}

async function names(started: Started, cookie: string, base: string): Promise<string[]> {
  const list = await send(started.url, 'get', `${base}/presets`, cookie);
  return list.body.presets.map((row: { name: string }) => row.name);
}

// Each start compiles the program anew: ten seconds and more when other tests take the processor.
describe('the server as a process', { timeout: 150_000 }, () => {
  let dataDir: string;
  const started: Started[] = [];
  const run = async (more?: Record<string, string>): Promise<Started> => {
    const next = await launch(dataDir, more);
    started.push(next);
    return next;
  };
  beforeEach(() => {
    dataDir = mkdtempSync(join(tmpdir(), 'gemel-process-'));
  });
  afterEach(async () => {
    for (const one of started.splice(0)) {
      one.child.kill('SIGKILL');
      await one.ended;
    }
    rmSync(dataDir, { recursive: true, force: true });
  });

  it('refuses a second one on the same data, keeps rows over a restart, and cleans up', async () => {
    const first = await run();
    await ready(first);
    expect(statSync(join(dataDir, 'secrets.json')).mode & 0o777).toBe(0o600);
    const second = await run();
    expect(await second.ended).toEqual({ code: 1, signal: null });
    expect(second.output().trim()).toMatch(
      new RegExp(
        `^The data directory .* is in use by another Gemel server \\(process ${first.child.pid}\\)\\.[^\\n]*$`,
      ),
    );
    const { cookie, base } = await enter(first);
    await store(first, cookie, base, 'kept over restart');
    first.child.kill('SIGTERM');
    expect(await first.ended).toEqual({ code: 0, signal: null });
    expect(existsSync(join(dataDir, 'db.lock'))).toBe(false);
    const third = await run();
    await ready(third);
    // The session cookie is still good: secret and session row are kept.
    expect(await names(third, cookie, base)).toContain('kept over restart');
  });

  it('starts after its holder was killed, with every answered write', async () => {
    const first = await run();
    await ready(first);
    const { cookie, base } = await enter(first);
    for (let k = 0; k < 5; k++) await store(first, cookie, base, `answered ${k}`);
    first.child.kill('SIGKILL');
    await first.ended;
    expect(existsSync(join(dataDir, 'db.lock'))).toBe(true);
    const second = await run();
    await ready(second);
    const kept = await names(second, cookie, base);
    for (let k = 0; k < 5; k++) expect(kept).toContain(`answered ${k}`);
  });

  it('starts after a kill in the middle of its first start', async () => {
    const first = await run();
    while (!existsSync(join(dataDir, 'db'))) await new Promise((resolve) => setTimeout(resolve, 10));
    first.child.kill('SIGKILL');
    await first.ended;
    const second = await run();
    await ready(second);
    await enter(second);
  });

  it('is not fooled by a process id used again', async () => {
    const boot = existsSync('/proc/self/stat');
    // This test runner is alive, but began at another moment than the lock says.
    writeFileSync(
      join(dataDir, 'db.lock'),
      JSON.stringify({ pid: process.pid, began: 'another boot:1', token: 'x' }),
    );
    const first = await run();
    if (boot) await ready(first);
    else expect((await first.ended).code).toBe(1);
  });

  it('closes the demo sign-in when others can reach the server, also for data that had it', async () => {
    const first = await run();
    await ready(first);
    const { cookie } = await enter(first);
    const secrets = JSON.parse(readFileSync(join(dataDir, 'secrets.json'), 'utf8')) as {
      demoPassword: string;
    };
    first.child.kill('SIGTERM');
    await first.ended;
    const open = await run({
      HOST: '0.0.0.0',
      GEMEL_ORIGIN: 'http://bench.example',
      GEMEL_LEAD_EMAIL: 'first@bench.example',
    });
    await ready(open);
    expect(await (await fetch(`${open.url}/api/server`)).json()).toMatchObject({ demo: null });
    expect((await send(open.url, 'get', '/api/me', cookie)).status).toBe(401);
    const signIn = (email: string, password: string) =>
      send(open.url, 'post', '/api/auth/sign-in/email', null, { email, password }).set(
        'Origin',
        'http://bench.example',
      );
    expect((await signIn('lead@demo.gemel', secrets.demoPassword)).status).toBe(401);
    expect(open.output()).not.toContain('Demo sign-in');
    const shown = /First lead: first@bench\.example {2}password: (\S+)/.exec(open.output())?.[1] ?? '';
    expect((await signIn('first@bench.example', shown)).status).toBe(200);
  });

  it('says in one sentence what is wrong with a setting', async () => {
    for (const [more, sentence] of [
      [{ HOST: '0.0.0.0', GEMEL_API_PORT: '70000' }, /^The setting GEMEL_API_PORT is "70000": .*\n$/],
      [
        { DATABASE_URL: 'postgres://nobody@127.0.0.1:1/none' },
        /^The database of DATABASE_URL cannot be used: .*\n$/,
      ],
    ] as const) {
      const one = await run(more);
      expect((await one.ended).code).toBe(1);
      expect(one.output()).toMatch(sentence);
    }
  });
});
