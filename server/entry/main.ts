import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { z } from '../../shared/util/zod';
import { parseConfig } from '../platform/config';
import { createLog } from '../platform/log';
import { StartProblem } from '../platform/refusal';
import { printError } from '../platform/safe-error';
import { start } from './start';

// Two folders below the project, both as server/entry/main.ts and as dist/server/main.js.
const root = fileURLToPath(new URL('../../', import.meta.url));
const say = (line: string): void => void process.stdout.write(`${line}\n`);

async function main(): Promise<void> {
  const packageFile = z
    .object({ version: z.string() })
    .parse(JSON.parse(readFileSync(`${root}package.json`, 'utf8')));
  const config = parseConfig(process.env, { root, development: import.meta.url.endsWith('.ts') });
  const log = createLog(config.logLevel);
  const starting = start(config, { root, version: packageFile.version }, log, say);

  // Also while starting: the database is then opened to its end and closed properly.
  let stopping = false;
  const stop = async (signal: string): Promise<void> => {
    if (stopping) return;
    stopping = true;
    say(`Stopping (${signal}).`);
    await (await starting).stop();
    process.exit(0);
  };
  for (const signal of ['SIGTERM', 'SIGINT'] as const) {
    process.on(signal, () => {
      stop(signal).catch((error: unknown) => {
        log.error({ err: error }, 'stopping failed');
        process.exit(1);
      });
    });
  }

  const running = await starting;
  say(`Gemel ${packageFile.version} is ready at ${config.origin}`);
  if (config.databaseUrl === null) say(`Data: ${config.dataDir}`);
  if (running.demo !== null) {
    say(`Demo sign-in: ${running.demo.email}  password: ${running.demo.password}`);
    say('  (also analyst@, runner@ and guest@demo.gemel, same password; this machine only)');
  }
}

main().catch((error: unknown) => {
  const text = error instanceof StartProblem ? error.message : printError(error);
  process.stderr.write(`${text}\n`);
  process.exit(1);
});
