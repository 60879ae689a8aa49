import { spawnSync } from 'node:child_process';
import { existsSync } from 'node:fs';

/** Programs the tests need beside Node: a browser, writers of files that are not ours, and a spreader of shards. */

const chromiumPaths = ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'];

export function findChromium(): string | null {
  const named = process.env.CHROMIUM_PATH;
  if (named !== undefined && existsSync(named)) return named;
  return chromiumPaths.find((path) => existsSync(path)) ?? null;
}

export function findPythonWithH5py(): string | null {
  for (const python of ['/usr/bin/python3', 'python3']) {
    if (spawnSync(python, ['-c', 'import h5py'], { stdio: 'ignore' }).status === 0) return python;
  }
  return null;
}

/** Debian's own, because that is where its packages of Python go. */
function findDebianPython(module: string): string | null {
  const python = '/usr/bin/python3';
  return spawnSync(python, ['-c', `import ${module}`], { stdio: 'ignore' }).status === 0 ? python : null;
}

export function findParallel(): string | null {
  // Debian's moreutils has another program of this name; only GNU's says whose it is.
  const { stdout } = spawnSync('parallel', ['--version'], { encoding: 'utf8' });
  return stdout?.startsWith('GNU parallel') ? 'parallel' : null;
}

interface Tool {
  debian: string;
  purpose: string;
  find(): string | null;
}

const tools: readonly Tool[] = [
  { debian: 'chromium', purpose: 'the browser tests', find: findChromium },
  { debian: 'python3-h5py', purpose: 'the tests on files that h5py wrote', find: findPythonWithH5py },
  {
    debian: 'python3-numpy',
    purpose: 'the tests on files that NumPy wrote',
    find: () => findDebianPython('numpy'),
  },
  {
    debian: 'python3-tifffile',
    purpose: 'the tests on TIFF files that tifffile wrote',
    find: () => findDebianPython('tifffile'),
  },
  {
    debian: 'python3-pil',
    purpose: 'the tests on TIFF files that libtiff wrote',
    find: () => findDebianPython('PIL'),
  },
  { debian: 'parallel', purpose: 'the tests of runs on many machines', find: findParallel },
];

/** Installs what is missing from Debian when that is allowed; throws with what to install otherwise. Never skips. */
export function ensureTools(): void {
  const missing = tools.filter((tool) => tool.find() === null);
  if (missing.length === 0) return;
  const names = missing.map((tool) => tool.debian);
  if (process.getuid?.() === 0 && existsSync('/usr/bin/apt-get')) {
    console.log(`Installing ${names.join(' and ')} from Debian for the tests.`);
    const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' };
    spawnSync('apt-get', ['update', '-qq'], { stdio: 'inherit', env });
    spawnSync('apt-get', ['install', '-y', '-qq', '--no-install-recommends', ...names], {
      stdio: 'inherit',
      env,
    });
  }
  const still = missing.filter((tool) => tool.find() === null);
  if (still.length === 0) return;
  const what = still.map((tool) => `${tool.debian} (for ${tool.purpose})`).join(' and ');
  throw new Error(
    `Missing: ${what}. Install with "sudo apt-get install ${still.map((tool) => tool.debian).join(' ')}", or set CHROMIUM_PATH to a Chromium you have, and run npm test again.`,
  );
}
