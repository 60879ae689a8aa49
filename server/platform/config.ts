import { resolve } from 'node:path';
import { z } from '../../shared/util/zod';
import { StartProblem } from './refusal';
import { redact } from './safe-error';

/** What the environment may say. Every setting has a default that works on one machine. */
export interface Config {
  host: string;
  port: number;
  dataDir: string;
  /** null: the database inside the data directory. */
  databaseUrl: string | null;
  /** Address people type, without a path. */
  origin: string;
  /** Origins whose requests may carry a session. */
  trustedOrigins: string[];
  /**
   * Whom to believe about the address a request comes from: nobody, so many proxies in front, or proxies on this
   * machine. Believing a sender who is no proxy lets anybody pass for many addresses.
   */
  proxy: false | number | 'loopback';
  /** Only this machine can connect, and no proxy hands on others: the demo sign-in exists only then. */
  loopback: boolean;
  development: boolean;
  logLevel: string;
  /** First lead of a server that has no demo sign-in. */
  leadEmail: string | null;
  /** Name the group of that lead is given when it is made. */
  groupName: string;
}

const portWords = 'expected a whole number from 1 to 65535';
const port = z.coerce.number(portWords).int(portWords).min(1, portWords).max(65535, portWords);
const optional = <T extends z.ZodType>(schema: T) =>
  z.preprocess((value) => (value === '' ? undefined : value), schema.optional());

const environmentSchema = z.object({
  HOST: optional(z.string().regex(/^[A-Za-z0-9.:_-]+$/, 'expected a host name or an IP address')),
  PORT: optional(port),
  GEMEL_API_PORT: optional(port),
  GEMEL_DATA: optional(z.string()),
  DATABASE_URL: optional(
    z.string().regex(/^postgres(ql)?:\/\//, 'expected an address that starts with postgres://'),
  ),
  GEMEL_ORIGIN: optional(
    z.url({ protocol: /^https?$/, error: 'expected an address such as https://gemel.example.org' }),
  ),
  GEMEL_PROXY: optional(
    z.string().regex(/^([1-9]|loopback)$/, 'expected the number of proxies in front (1 to 9), or loopback'),
  ),
  GEMEL_LOG: optional(
    z.enum(['silent', 'error', 'warn', 'info', 'debug'], 'expected silent, error, warn, info or debug'),
  ),
  GEMEL_LEAD_EMAIL: optional(z.email('expected an e-mail address')),
  GEMEL_GROUP: optional(
    z
      .string()
      .trim()
      .regex(/^\P{Cc}{1,100}$/u, 'expected a name of one line, up to 100 characters'),
  ),
});

export function isLoopback(host: string): boolean {
  return host === 'localhost' || host === '::1' || /^127\.\d+\.\d+\.\d+$/.test(host);
}

/** Throws StartProblem with one sentence that names the variable. */
export function parseConfig(
  environment: Record<string, string | undefined>,
  place: { root: string; development: boolean },
): Config {
  const parsed = environmentSchema.safeParse(environment);
  if (!parsed.success) {
    const issue = parsed.error.issues[0];
    const name = String(issue?.path[0] ?? 'environment');
    const wrong = issue?.message ?? 'it cannot be used';
    // Whatever was typed in place of a database address may hold its password.
    const found =
      name === 'DATABASE_URL' ? 'cannot be used and is not shown' : `is "${redact(environment[name] ?? '')}"`;
    throw new StartProblem(`The setting ${name} ${found}: ${wrong}. Correct it or leave it out.`);
  }
  const given = parsed.data;
  const proxy = given.GEMEL_PROXY === 'loopback' ? 'loopback' : Number(given.GEMEL_PROXY ?? 0) || false;
  if (proxy !== false && given.GEMEL_ORIGIN === undefined) {
    throw new StartProblem(
      'GEMEL_PROXY says that a proxy stands in front, so other machines can reach this server: set GEMEL_ORIGIN to the address people type, for example GEMEL_ORIGIN=https://gemel.example.org.',
    );
  }
  const host = given.HOST ?? '127.0.0.1';
  const listenPort = (place.development ? given.GEMEL_API_PORT : given.PORT) ?? 4310;
  const origin = publicOrigin(host, listenPort, given.GEMEL_ORIGIN, place.development);
  return {
    host,
    port: listenPort,
    dataDir: resolve(place.root, given.GEMEL_DATA ?? 'data'),
    databaseUrl: given.DATABASE_URL ?? null,
    origin,
    trustedOrigins: sameMachineOrigins(origin),
    proxy,
    loopback:
      proxy === false && isLoopback(host) && isLoopback(new URL(origin).hostname.replace(/^\[|\]$/g, '')),
    development: place.development,
    logLevel: given.GEMEL_LOG ?? 'info',
    leadEmail: given.GEMEL_LEAD_EMAIL?.toLowerCase() ?? null,
    groupName: given.GEMEL_GROUP ?? 'Our group',
  };
}

function publicOrigin(host: string, listenPort: number, given: string | undefined, dev: boolean): string {
  if (given !== undefined) return new URL(given).origin;
  // In development the page comes from Vite, which hands /api on to this server.
  if (dev) return 'http://127.0.0.1:5173';
  if (host === '0.0.0.0' || host === '::') {
    throw new StartProblem(
      `HOST is ${host}, so other machines can reach this server: set GEMEL_ORIGIN to the address people type, for example GEMEL_ORIGIN=http://bench.example.org:${listenPort}.`,
    );
  }
  return `http://${host.includes(':') ? `[${host}]` : host}:${listenPort}`;
}

/** localhost and 127.0.0.1 are the same machine under two names; a person may type either. */
function sameMachineOrigins(origin: string): string[] {
  const url = new URL(origin);
  if (!isLoopback(url.hostname.replace(/^\[|\]$/g, ''))) return [origin];
  const end = url.port === '' ? '' : `:${url.port}`;
  const names = [url.hostname, 'localhost', '127.0.0.1', '[::1]'];
  return [...new Set(names.map((name) => `${url.protocol}//${name}${end}`))];
}
