import { spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { findPythonWithH5py } from '../support/tools';

export const benchFolder = fileURLToPath(new URL('.', import.meta.url));
export const rootFolder = fileURLToPath(new URL('../..', import.meta.url));

/** Python with all that the yardsticks need. Throws with what is missing and how to get it. */
export function requirePython(): string {
  const python = findPythonWithH5py();
  if (python === null)
    throw new Error(
      'The bench compares with NumPy and SciPy, and no Python with h5py was found: install Debian\'s "python3-h5py" and "python3-scipy".',
    );
  const missing = ['numpy', 'scipy'].filter(
    (name) => spawnSync(python, ['-c', `import ${name}`], { stdio: 'ignore' }).status !== 0,
  );
  if (missing.length > 0)
    throw new Error(
      `${python} lacks ${missing.join(' and ')}: install Debian's ${missing.map((name) => `"python3-${name}"`).join(' and ')}.`,
    );
  return python;
}

export function hasCompiler(): boolean {
  return spawnSync('g++', ['--version'], { stdio: 'ignore' }).status === 0;
}

/** Compiles one of the limits in tests/bench/cpp into `folder`; returns the program. */
export function compileLimit(name: string, folder: string): string {
  const program = `${folder}/${name}`;
  const args = ['-O3', '-march=native', '-std=c++17', '-o', program, `${benchFolder}/cpp/${name}.cpp`];
  const { status, stderr } = spawnSync('g++', args, { encoding: 'utf8' });
  if (status !== 0) throw new Error(`g++ could not compile ${name}.cpp: ${stderr}`);
  return program;
}
