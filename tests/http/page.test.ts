import request from 'supertest';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { openEmbedded } from '../../server/data/client';
import { createApp } from '../../server/entry/create-app';
import { type Harness, openHarness, origin } from './harness';

describe('the page and its headers', () => {
  let h: Harness;
  beforeAll(async () => {
    h = await openHarness(() => openEmbedded(null));
  });
  afterAll(async () => {
    await h?.close();
  });

  it.each([
    '/',
    '/bench',
    '/results/some-id',
    '/assets/compute-1a2b.js',
    '/assets/kernels-1a2b.wasm',
    '/mark.svg',
    '/api/health',
    '/api/nothing',
    '/assets/missing.js',
  ])('%s is isolated and under the content policy', async (path) => {
    const { headers } = await request(h.app).get(path);
    expect(headers['cross-origin-opener-policy']).toBe('same-origin');
    expect(headers['cross-origin-embedder-policy']).toBe('require-corp');
    expect(headers['cross-origin-resource-policy']).toBe('same-origin');
    expect(headers['x-content-type-options']).toBe('nosniff');
    expect(headers['x-powered-by']).toBeUndefined();
    const policy = String(headers['content-security-policy']);
    expect(policy.replace(/nonce-[A-Za-z0-9+/]{24}/, 'nonce-X').split(';')).toEqual([
      "default-src 'self'",
      "script-src 'self' 'wasm-unsafe-eval'",
      "worker-src 'self'",
      "style-src 'self' 'nonce-X'",
      "img-src 'self' data: blob:",
      "font-src 'self'",
      "connect-src 'self'",
      "object-src 'none'",
      "base-uri 'none'",
      "frame-ancestors 'none'",
      "form-action 'self'",
    ]);
  });

  it('gives every answer of the page its own nonce, the same in head and policy', async () => {
    const nonces = new Set<string>();
    for (const path of ['/', '/index.html', '/group/members']) {
      const { text, headers } = await request(h.app).get(path);
      const nonce = /<meta name="csp-nonce" nonce="([^"]+)">/.exec(text)?.[1] ?? 'none';
      expect(headers['content-security-policy']).toContain(`'nonce-${nonce}'`);
      expect(headers['cache-control']).toBe('no-store');
      expect(text.match(/csp-nonce/g)).toHaveLength(1);
      nonces.add(nonce);
    }
    expect(nonces.size).toBe(3);
  });

  it('serves hashed files for a year, packed where it helps, with their types', async () => {
    const script = await request(h.app).get('/assets/compute-1a2b.js').set('Accept-Encoding', 'gzip');
    expect(script.headers['cache-control']).toBe('public, max-age=31536000, immutable');
    expect(script.headers['content-encoding']).toBe('gzip');
    expect(script.headers['content-type']).toMatch(/javascript/);
    const wasm = await request(h.app).get('/assets/kernels-1a2b.wasm');
    expect(wasm.headers['content-type']).toBe('application/wasm');
  });

  it('never answers a missing file or address with the page', async () => {
    for (const path of ['/assets/missing.js', '/assets/', '/assets', '/api/nothing', '/api']) {
      const answer = await request(h.app).get(path);
      expect([path, answer.status, answer.body.error?.code]).toEqual([path, 404, 'not-found']);
    }
    for (const path of [
      '/../package.json',
      '/%2e%2e/%2e%2e/package.json',
      '/assets/%2e%2e/%2e%2e/data/secrets.json',
    ]) {
      expect((await request(h.app).get(path)).text).not.toMatch(/"version"|demoPassword/);
    }
  });

  it('names the asked address, without its query', async () => {
    const told = async (path: string) => (await request(h.app).get(path)).body.error.message;
    expect(await told('/api/nothing?token=hidden')).toBe('The server has no address GET /api/nothing.');
    expect(await told('/api')).toBe('The server has no address GET /api.');
    expect(await told('/assets/missing.js?v=1')).toMatch(
      /^The page has no file \/assets\/missing\.js\. .*load the page/,
    );
  });

  it('asks browsers for https, and for secure cookies only, when the address is https', async () => {
    const app = createApp({ ...h.deps, origin: 'https://gemel.example' });
    expect((await request(app).get('/')).headers['strict-transport-security']).toContain('max-age=31536000');
    expect((await request(h.app).get('/')).headers['strict-transport-security']).toBeUndefined();
  });

  it('slows down guessing of passwords, but not signing in', async () => {
    const app = createApp({ ...h.deps, limits: { failures: 3, calls: 100 } });
    const attempt = (password: string) =>
      request(app)
        .post('/api/auth/sign-in/email')
        .set('Origin', origin)
        .send({ email: 'lead@bench.example', password });
    for (let k = 0; k < 5; k++) expect((await attempt('a long enough one')).status).toBe(200);
    for (let k = 0; k < 3; k++) expect((await attempt('wrong one here')).status).toBe(401);
    const last = await attempt('wrong one here');
    expect([last.status, last.body.error.code]).toEqual([429, 'too-many']);
  });

  it.each([
    [false, 429],
    ['loopback', 401],
    [1, 401],
  ] as const)(
    'with GEMEL_PROXY %s a new X-Forwarded-For after the last attempt gets %i',
    async (proxy, status) => {
      const app = createApp({ ...h.deps, proxy, limits: { failures: 2, calls: 100 } });
      const attempt = (from: string) =>
        request(app)
          .post('/api/auth/sign-in/email')
          .set('Origin', origin)
          .set('X-Forwarded-For', from)
          .send({ email: 'lead@bench.example', password: 'wrong one here' });
      for (let k = 0; k < 2; k++) expect((await attempt('203.0.113.1')).status).toBe(401);
      expect((await attempt('203.0.113.2')).status).toBe(status);
      // What the proxy itself adds comes last; what a client put before it is not believed.
      expect((await attempt('203.0.113.9, 203.0.113.1')).status).toBe(429);
    },
  );
});
