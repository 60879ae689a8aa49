import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { openBrowser, openPage, type Visit } from './browser';
import { type BuiltServer, startBuiltServer } from './server';

/** A server on fresh data, a page on it, and a folder for files of one's own. */
export interface Scene extends Visit {
  server: BuiltServer;
  dir: string;
  close(): Promise<void>;
}

export async function openScene(): Promise<Scene> {
  const dir = mkdtempSync(join(tmpdir(), 'gemel-scene-'));
  const server = await startBuiltServer();
  const browser = await openBrowser();
  const visit = await openPage(browser, server.url);
  return {
    ...visit,
    server,
    dir,
    async close() {
      await browser.close();
      await server.close();
      rmSync(dir, { recursive: true, force: true });
    },
  };
}
