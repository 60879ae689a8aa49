import { existsSync, readdirSync, statSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

/**
 * Starts the command line: the bundle of `npm run build` when it is at least as new as everything it was made from,
 * else the sources through tsx, which takes seconds longer. Plain JavaScript, because it runs before tsx does.
 */
const root = fileURLToPath(new URL('../../', import.meta.url));
const bundle = `${root}dist/cli/entries/cli.js`;

/** A folder counts too: it changes when a file in it goes. */
function isNewer(path, thanMs) {
  const facts = statSync(path);
  if (facts.mtimeMs > thanMs) return true;
  return facts.isDirectory() && readdirSync(path).some((name) => isNewer(`${path}/${name}`, thanMs));
}

function isBundleFresh() {
  if (!existsSync(bundle)) return false;
  const builtMs = statSync(bundle).mtimeMs;
  return !['workers', 'shared', 'package-lock.json'].some((made) => isNewer(`${root}${made}`, builtMs));
}

if (isBundleFresh()) {
  await import(bundle);
} else {
  const { register } = await import('tsx/esm/api');
  register();
  await import('./cli.ts');
}
