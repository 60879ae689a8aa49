import { mkdirSync } from 'node:fs';
import { dirname } from 'node:path';
import { fileURLToPath } from 'node:url';
import { PGlite } from '@electric-sql/pglite';
import { drizzle as drizzlePostgres } from 'drizzle-orm/node-postgres';
import { migrate as migratePostgres } from 'drizzle-orm/node-postgres/migrator';
import type { PgDatabase, PgQueryResultHKT } from 'drizzle-orm/pg-core';
import { drizzle as drizzlePglite } from 'drizzle-orm/pglite';
import { migrate as migratePglite } from 'drizzle-orm/pglite/migrator';
import { Pool } from 'pg';
import { StartProblem } from '../platform/refusal';
import { reasonOf } from '../platform/safe-error';
import * as authTables from './schema/auth-tables';
import * as benchTables from './schema/bench-tables';

export const schema = { ...authTables, ...benchTables };
export type Database = PgDatabase<PgQueryResultHKT, typeof schema>;

export interface OpenDatabase {
  db: Database;
  kind: 'embedded' | 'postgres';
  close(): Promise<void>;
}

/** Beside this file in the source, beside main.js in the built server. */
const migrationsFolder = fileURLToPath(new URL('./migrations', import.meta.url));

/** `dir` null keeps the embedded database in memory (tests). The caller holds the lock of the data directory. */
export async function openEmbedded(dir: string | null): Promise<OpenDatabase> {
  if (dir !== null) mkdirSync(dirname(dir), { recursive: true });
  const client = await createEmbedded(dir);
  const db = drizzlePglite(client, { schema });
  await migratePglite(db, { migrationsFolder });
  return { db, kind: 'embedded', close: () => client.close() };
}

async function createEmbedded(dir: string | null): Promise<PGlite> {
  try {
    return await (dir === null ? PGlite.create() : PGlite.create(dir));
  } catch (error) {
    throw new StartProblem(
      `The database in ${dir ?? 'memory'} cannot be opened (${reasonOf(error)}). Restore the directory from a backup, or set GEMEL_DATA to a new one.`,
    );
  }
}

export async function openPostgres(url: string, onIdleError: (error: Error) => void): Promise<OpenDatabase> {
  const pool = new Pool({ connectionString: url, max: 10, connectionTimeoutMillis: 10_000 });
  // Without a listener a connection lost while idle would end the process.
  pool.on('error', onIdleError);
  const db = drizzlePostgres(pool, { schema });
  try {
    await pool.query('select 1');
    await migratePostgres(db, { migrationsFolder });
  } catch (error) {
    await pool.end();
    throw new StartProblem(
      `The database of DATABASE_URL cannot be used: ${reasonOf(error)}. Check that PostgreSQL runs and that the user may create tables.`,
    );
  }
  return { db, kind: 'postgres', close: () => pool.end() };
}
