import { randomBytes } from 'node:crypto';
import { Client } from 'pg';
import { afterAll, describe, it } from 'vitest';
import { openPostgres } from '../../server/data/client';
import { apiSuite } from './api-suite';

/** A server where a database may be created: the one named, or one on this machine with its usual port and user. */
const server = process.env.GEMEL_TEST_POSTGRES ?? 'postgres://postgres@127.0.0.1:5432/postgres';
const named = process.env.GEMEL_TEST_POSTGRES !== undefined;

async function onServer(statement: string): Promise<void> {
  const client = new Client({ connectionString: server, connectionTimeoutMillis: 2000 });
  await client.connect();
  try {
    await client.query(statement);
  } finally {
    await client.end();
  }
}

const unreachable = await onServer('select 1').then(
  () => null,
  (error: unknown) => String(error),
);
if (unreachable !== null && named) throw new Error(`GEMEL_TEST_POSTGRES cannot be reached: ${unreachable}`);

if (unreachable === null) {
  const name = `gemel_test_${randomBytes(6).toString('hex')}`;
  const url = new URL(server);
  url.pathname = `/${name}`;
  apiSuite('API on PostgreSQL', async () => {
    await onServer(`create database ${name}`);
    return openPostgres(url.href, () => {});
  });
  afterAll(() => onServer(`drop database if exists ${name} with (force)`));
} else {
  describe('API on PostgreSQL', () => {
    console.log('PostgreSQL suite: not run, no server reachable; name one in GEMEL_TEST_POSTGRES.');
    it.skip('PostgreSQL suite: not run, no server reachable', () => {});
  });
}
