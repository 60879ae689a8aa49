import { randomBytes } from 'node:crypto';
import type { IncomingMessage, ServerResponse } from 'node:http';
import type { NextFunction, Request, RequestHandler, Response } from 'express';
import helmet from 'helmet';
import { Refusal } from './refusal';

type WithNonce = ServerResponse & { locals?: { nonce?: string } };
const nonceSource = (_request: IncomingMessage, response: WithNonce): string =>
  `'nonce-${response.locals?.nonce ?? ''}'`;

/** A new nonce for every answer; the page reads it from its head and gives it to the styles it makes. */
export function giveNonce(_request: Request, response: Response, next: NextFunction): void {
  response.locals.nonce = randomBytes(18).toString('base64');
  next();
}

/**
 * Headers of every answer, scripts of workers and WASM included: content policy, and the isolation that shared memory
 * between page and workers needs.
 */
export function securityHeaders(https: boolean): RequestHandler {
  return helmet({
    contentSecurityPolicy: {
      useDefaults: false,
      directives: {
        defaultSrc: ["'self'"],
        scriptSrc: ["'self'", "'wasm-unsafe-eval'"],
        workerSrc: ["'self'"],
        styleSrc: ["'self'", nonceSource],
        imgSrc: ["'self'", 'data:', 'blob:'],
        fontSrc: ["'self'"],
        connectSrc: ["'self'"],
        objectSrc: ["'none'"],
        baseUri: ["'none'"],
        frameAncestors: ["'none'"],
        formAction: ["'self'"],
      },
    },
    crossOriginOpenerPolicy: { policy: 'same-origin' },
    crossOriginEmbedderPolicy: { policy: 'require-corp' },
    crossOriginResourcePolicy: { policy: 'same-origin' },
    referrerPolicy: { policy: 'no-referrer' },
    xFrameOptions: { action: 'deny' },
    strictTransportSecurity: https ? { maxAge: 31_536_000, includeSubDomains: false } : false,
  });
}

/** Changes come only from our own pages: a browser always names the page's origin when it sends one. */
export function refuseForeignOrigins(trusted: readonly string[]): RequestHandler {
  return (request, _response, next) => {
    const origin = request.get('origin');
    const foreign =
      origin !== undefined ? !trusted.includes(origin) : request.get('sec-fetch-site') === 'cross-site';
    if (foreign && request.method !== 'GET' && request.method !== 'HEAD') {
      throw new Refusal(
        'foreign-origin',
        `This request comes from ${origin ?? 'another site'}, and this server answers ${trusted[0] ?? 'its own pages'} only. Open that address, or set GEMEL_ORIGIN to the one you use.`,
      );
    }
    next();
  };
}

/**
 * On loopback the demo password is told to whoever asks, and a page from elsewhere can ask: it lets its own name point
 * to this machine after it was loaded. Such a request names that host. Ports are not compared: a name is enough to tell.
 */
export function refuseForeignHosts(trusted: readonly string[]): RequestHandler {
  const names = new Set(trusted.map((origin) => new URL(origin).hostname));
  return (request, _response, next) => {
    const host = request.get('host') ?? '';
    const name = host.toLowerCase().replace(/:\d*$/, '');
    if (!names.has(name)) {
      throw new Refusal(
        'foreign-host',
        `This request asks for the host ${JSON.stringify(host)}, and this server answers ${trusted[0] ?? 'this machine'} only. Open that address, or set GEMEL_ORIGIN to the one you use.`,
      );
    }
    next();
  };
}
