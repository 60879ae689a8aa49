import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, relative, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';

export const root = fileURLToPath(new URL('../../', import.meta.url));

export interface Import {
  from: string;
  /** Path in the project, or the package's name. */
  to: string;
  line: number;
  typeOnly: boolean;
}

const folders = ['src', 'workers', 'server', 'shared', 'samples/generators'];
const importPattern =
  /^(?:import|export)\s+(type\s+)?(?:[^'";]*?\sfrom\s+)?['"]([^'"]+)['"]|\bimport\(\s*['"]([^'"]+)['"]\s*\)|new URL\(\s*['"](\.[^'"]+\.ts)['"]/gm;

export function listSources(): string[] {
  return folders.flatMap((folder) =>
    readdirSync(join(root, folder), { recursive: true, encoding: 'utf8' })
      .filter((name) => /\.tsx?$/.test(name) && !name.endsWith('.d.ts'))
      .map((name) => join(folder, name)),
  );
}

/** Every import of the project's own code, relative ones resolved to files. */
export function listImports(): Import[] {
  const sources = new Set(listSources());
  return [...sources].flatMap((from) => {
    const text = readFileSync(join(root, from), 'utf8');
    return [...text.matchAll(importPattern)].map((match) => ({
      from,
      to: resolveImport(from, match[2] ?? match[3] ?? match[4] ?? '', sources),
      line: text.slice(0, match.index).split('\n').length,
      typeOnly: match[1] !== undefined,
    }));
  });
}

function resolveImport(from: string, specifier: string, sources: Set<string>): string {
  if (!specifier.startsWith('.')) return specifier;
  const base = relative(root, resolve(root, dirname(from), specifier.split('?')[0]!));
  return [base, `${base}.ts`, `${base}.tsx`].find((path) => sources.has(path)) ?? base;
}
