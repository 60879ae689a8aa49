import type { ErrorRequestHandler, Request, RequestHandler } from 'express';
import { Problem } from '../../shared/errors/problem';
import type { Logger } from '../platform/log';
import { Refusal } from '../platform/refusal';

export const refuseUnknown: RequestHandler = (request) => {
  throw new Refusal('not-found', `The server has no address ${request.method} ${askedAddress(request)}.`);
};

/** As it was asked, below whatever router, without the query, which may hold what is nobody's business. */
export function askedAddress(request: Request): string {
  return request.originalUrl.split('?', 1)[0] ?? '';
}

/** The one place where an error becomes an answer. What is not a refusal is logged and told without its details. */
export function createErrorHandler(log: Logger): ErrorRequestHandler {
  return (error: unknown, request, response, next) => {
    const refusal = toRefusal(error);
    if (refusal.status >= 500)
      log.error({ err: error, method: request.method, path: askedAddress(request) }, 'failed');
    if (response.headersSent) return next(error);
    // A failed answer must not be kept by any cache, whatever its route wished.
    response.set('Cache-Control', 'no-store');
    response.status(refusal.status).json(refusal.toBody());
  };
}

function toRefusal(error: unknown): Refusal {
  if (error instanceof Refusal) return error;
  if (error instanceof Problem) {
    return new Refusal(
      error.code === 'newer-version' ? 'newer-version' : 'internal',
      error.message,
      error.place,
    );
  }
  const { type, status } = httpTraits(error);
  if (type === 'entity.parse.failed') {
    return new Refusal('malformed-json', `The body is not JSON: ${(error as Error).message}.`);
  }
  if (type === 'entity.too.large') {
    return new Refusal(
      'too-large',
      'The body is larger than this address takes (64 MB for results, 1 MB elsewhere).',
    );
  }
  if (type === 'encoding.unsupported' || type === 'charset.unsupported') {
    return new Refusal('not-json', 'Send the body as JSON in UTF-8, plain or packed with gzip.');
  }
  if (status === 404)
    return new Refusal('not-found', 'The file is named but not there; make the samples again.');
  if (status >= 400 && status < 500)
    return new Refusal('bad-input', `The request cannot be read: ${(error as Error).message}.`);
  return new Refusal(
    'internal',
    'Something failed on the server, and nothing was changed by this request; its log says why.',
  );
}

function httpTraits(error: unknown): { type: string; status: number } {
  if (!(error instanceof Error)) return { type: '', status: 500 };
  const type = 'type' in error && typeof error.type === 'string' ? error.type : '';
  const status = 'status' in error && typeof error.status === 'number' ? error.status : 500;
  return { type, status };
}
