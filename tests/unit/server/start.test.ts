import { existsSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pino } from 'pino';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { start } from '../../../server/entry/start';
import { parseConfig } from '../../../server/platform/config';
import { takeLock } from '../../../server/platform/process-lock';

describe('start', () => {
  let dataDir: string;
  beforeEach(() => {
    dataDir = mkdtempSync(join(tmpdir(), 'gemel-start-'));
  });
  afterEach(() => rmSync(dataDir, { recursive: true, force: true }));

  const begin = (environment: Record<string, string>) =>
    start(
      parseConfig({ GEMEL_DATA: dataDir, ...environment }, { root: dataDir, development: true }),
      { root: dataDir, version: '0.0.0' },
      pino({ level: 'silent' }),
      () => {},
    );
  const nowhere = { DATABASE_URL: 'postgres://nobody@127.0.0.1:1/none' };

  it.each([{}, nowhere])('touches nothing in a data directory in use, %o', async (environment) => {
    const lock = takeLock(join(dataDir, 'db.lock'));
    await expect(begin(environment)).rejects.toThrow(/is in use by another Gemel server/);
    expect(existsSync(join(dataDir, 'secrets.json'))).toBe(false);
    lock.release();
  });

  it('gives the lock back when a later step fails', async () => {
    await expect(begin(nowhere)).rejects.toThrow(/^The database of DATABASE_URL cannot be used/);
    expect(existsSync(join(dataDir, 'db.lock'))).toBe(false);
    writeFileSync(join(dataDir, 'secrets.json'), 'damaged');
    await expect(begin(nowhere)).rejects.toThrow(/secrets\.json/);
    expect(existsSync(join(dataDir, 'db.lock'))).toBe(false);
  });
});
