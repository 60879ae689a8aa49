import { randomBytes } from 'node:crypto';
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { z } from '../../shared/util/zod';
import { StartProblem } from './refusal';

const secretsSchema = z.object({ session: z.string().min(32), demoPassword: z.string().min(8) });
export type Secrets = z.infer<typeof secretsSchema>;

/** Reads the secrets of the data directory, or makes them on first start; only the owner may read the file. */
export function loadSecrets(dataDir: string): Secrets {
  mkdirSync(dataDir, { recursive: true, mode: 0o700 });
  const path = join(dataDir, 'secrets.json');
  if (existsSync(path)) {
    const parsed = secretsSchema.safeParse(readJson(path));
    if (parsed.success) return parsed.data;
    throw new StartProblem(
      `The file ${path} is damaged. Remove it to get new secrets; everybody then signs in again.`,
    );
  }
  const secrets: Secrets = {
    session: randomBytes(48).toString('base64url'),
    demoPassword: `pair-${randomBytes(6).toString('hex')}`,
  };
  writeFileSync(path, `${JSON.stringify(secrets, null, 2)}\n`, { mode: 0o600, flag: 'wx' });
  return secrets;
}

function readJson(path: string): unknown {
  try {
    return JSON.parse(readFileSync(path, 'utf8'));
  } catch (error) {
    throw new StartProblem(`The file ${path} cannot be read (${String(error)}). Restore or remove it.`);
  }
}
