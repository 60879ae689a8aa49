import { randomBytes } from 'node:crypto';
import { createServer, type Server } from 'node:http';
import { join } from 'node:path';
import type { ServerInfo } from '../../shared/contracts/http';
import { type Database, type OpenDatabase, openEmbedded, openPostgres, schema } from '../data/client';
import { createMapStore } from '../data/map-store';
import { createPeople } from '../data/repositories/people';
import { createPresets } from '../data/repositories/presets';
import { createResults } from '../data/repositories/results';
import { createSessions } from '../data/repositories/sessions';
import { createSampleStore } from '../data/sample-store';
import {
  admitFirstLead,
  closeDemo,
  hasRealLead,
  isDemoEmail,
  openDemo,
  type SeedStores,
} from '../domain/seed';
import { createAuth, hashNewPassword } from '../platform/auth';
import { type Config, isLoopback } from '../platform/config';
import type { Logger } from '../platform/log';
import { takeLock } from '../platform/process-lock';
import { StartProblem } from '../platform/refusal';
import { loadSecrets, type Secrets } from '../platform/secrets';
import { type AppDeps, createApp } from './create-app';

export interface Place {
  /** Folder that holds samples/ and dist/. */
  root: string;
  version: string;
}

export interface Running {
  server: Server;
  demo: ServerInfo['demo'];
  stop(): Promise<void>;
}

/** Lock, database, first contents, listen; undone in the opposite order when a step fails. */
export async function start(
  config: Config,
  place: Place,
  log: Logger,
  say: (line: string) => void,
): Promise<Running> {
  // Before anything is read or made there; also with a database elsewhere, because secrets and maps are in the directory.
  const lock = takeLock(join(config.dataDir, 'db.lock'));
  let database: OpenDatabase | null = null;
  const undo = async (): Promise<void> => {
    try {
      await database?.close();
    } finally {
      lock.release();
    }
  };
  try {
    const secrets = loadSecrets(config.dataDir);
    database = await openDatabase(config, log);
    const deps = await assemble(config, place, secrets, database.db, log, say);
    const server = createServer(createApp(deps));
    await listen(server, config);
    const stop = async (): Promise<void> => {
      await closeServer(server);
      await undo();
    };
    return { server, demo: deps.info.demo, stop };
  } catch (error) {
    await undo();
    throw error;
  }
}

function openDatabase(config: Config, log: Logger): Promise<OpenDatabase> {
  if (config.databaseUrl === null) return openEmbedded(join(config.dataDir, 'db'));
  return openPostgres(config.databaseUrl, (error) =>
    log.warn({ err: error }, 'a database connection was lost'),
  );
}

/** Everything the app stands on, over an open database; also what the tests run on. */
export async function assemble(
  config: Config,
  place: Place,
  secrets: Secrets,
  db: Database,
  log: Logger,
  say: (line: string) => void,
): Promise<AppDeps> {
  const people = createPeople(db);
  const presets = createPresets(db);
  const samples = createSampleStore(join(place.root, 'samples'));
  const auth = createAuth({
    db,
    schema,
    secret: secrets.session,
    origin: config.origin,
    trustedOrigins: config.trustedOrigins,
    log: (level, message) => log[level === 'success' ? 'info' : level](message),
  });
  const seed: SeedStores = {
    people,
    presets,
    samples,
    hash: hashNewPassword,
    note: (text) => log.warn(text),
  };
  // Asked at every request: another server on the same database may open its demo at any time.
  const isBarred = (email: string): boolean => !config.loopback && isDemoEmail(email);
  const demo = config.loopback ? await openDemo(seed, secrets.demoPassword) : null;
  if (!config.loopback) await prepareOpenServer(config, seed, say);
  return {
    people,
    presets,
    samples,
    sessions: createSessions(db),
    results: createResults(db),
    maps: createMapStore(join(config.dataDir, 'maps')),
    info: { version: place.version, demo },
    whoIs: async (headers) => {
      const person = await auth.whoIs(headers);
      return person === null || isBarred(person.email) ? null : person;
    },
    isBarred,
    signInLibrary: auth.handler,
    origin: config.origin,
    trustedOrigins: config.trustedOrigins,
    loopback: config.loopback,
    log,
    proxy: config.proxy,
    limits: { failures: 20, calls: 600 },
    pageDir: config.development ? null : join(place.root, 'dist/client'),
  };
}

/** A server that others can reach has no demo sign-in; its first lead is named by GEMEL_LEAD_EMAIL. */
async function prepareOpenServer(
  config: Config,
  seed: SeedStores,
  say: (line: string) => void,
): Promise<void> {
  await closeDemo(seed.people);
  if (config.proxy === false && isLoopback(config.host)) {
    say(
      'GEMEL_ORIGIN is an address other machines reach and HOST is this machine alone, so a proxy stands in front: set GEMEL_PROXY=loopback, or everybody shares one limit of failed sign-ins.',
    );
  }
  if (config.leadEmail === null || (await seed.people.hasPerson(config.leadEmail))) {
    if (await hasRealLead(seed.people)) return;
    say(
      'Nobody leads this server yet, so nobody can be let in: set GEMEL_LEAD_EMAIL to the e-mail address of its first lead and start again.',
    );
    return;
  }
  const password = randomBytes(12).toString('base64url');
  await admitFirstLead(seed, config.groupName, config.leadEmail, password);
  say(`First lead: ${config.leadEmail}  password: ${password}  (shown once; change it after signing in)`);
}

function listen(server: Server, config: Config): Promise<void> {
  return new Promise((resolve, reject) => {
    server.once('error', (error) => {
      const code = 'code' in error ? String(error.code) : '';
      const why = code === 'EADDRINUSE' ? 'another program uses it' : error.message;
      reject(
        new StartProblem(
          `Cannot listen on ${config.host} port ${config.port}: ${why}. Set ${config.development ? 'GEMEL_API_PORT' : 'PORT'} to a free port.`,
        ),
      );
    });
    server.listen(config.port, config.host, () => resolve());
  });
}

/** Lets running requests finish, five seconds at most. */
function closeServer(server: Server): Promise<void> {
  return new Promise((resolve) => {
    const late = setTimeout(() => server.closeAllConnections(), 5000);
    server.close(() => {
      clearTimeout(late);
      resolve();
    });
    server.closeIdleConnections();
  });
}
