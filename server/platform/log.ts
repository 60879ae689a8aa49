import { type DestinationStream, type Logger, pino } from 'pino';
import { type HttpLogger, pinoHttp } from 'pino-http';
import { describeError } from './safe-error';

export type { Logger } from 'pino';

/** One JSON line per event on standard error; standard output is for the few lines a person reads at start. */
export function createLog(level: string, destination: DestinationStream = pino.destination(2)): Logger {
  return pino(
    {
      level,
      base: null,
      timestamp: pino.stdTimeFunctions.isoTime,
      serializers: { err: (error: unknown) => describeError(error) },
    },
    destination,
  );
}

/** Logs method, path, status and time of API requests; never bodies, cookies or query strings. */
export function createHttpLog(log: Logger): HttpLogger {
  return pinoHttp({
    logger: log,
    quietReqLogger: true,
    autoLogging: { ignore: (request) => !(request.url ?? '').startsWith('/api/') },
    serializers: {
      req: (request: { id: unknown; method: string; url: string }) => ({
        id: request.id,
        method: request.method,
        path: request.url.split('?', 1)[0],
      }),
      err: (error: unknown) => describeError(error),
      res: (response: { statusCode: number }) => ({ status: response.statusCode }),
    },
    customLogLevel: (_request, response, error) =>
      error || response.statusCode >= 500 ? 'error' : response.statusCode >= 400 ? 'warn' : 'info',
  });
}
