import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { debts } from './debts';
import { type Import, listImports, listSources, root } from './imports';

/** Who may import whom. A room is the longest of these prefixes; the list says which rooms it may use beside itself. */
const allowed: Record<string, readonly string[]> = {
  'shared/util': [],
  'shared/units': ['shared/util'],
  'shared/errors': ['shared/units', 'shared/util'],
  'shared/physics': ['shared/units', 'shared/util', 'shared/errors'],
  'shared/contracts': ['shared/physics', 'shared/errors', 'shared/units', 'shared/util'],

  'workers/kernels': ['shared'],
  'workers/formats': ['shared'],
  'workers/accumulators': ['workers/kernels', 'shared'],
  'workers/studies': ['workers/accumulators', 'workers/kernels', 'shared'],
  'workers/pipeline': [
    'workers/formats',
    'workers/studies',
    'workers/accumulators',
    'workers/kernels',
    'shared',
  ],
  'workers/simulate': ['shared'],
  'workers/entries': [
    'workers/pipeline',
    'workers/formats',
    'workers/studies',
    'workers/accumulators',
    'workers/simulate',
    'shared',
  ],
  'workers/vite.config.ts': [],
  'samples/generators': ['workers/simulate', 'workers/entries/node-writers.ts', 'shared'],

  'server/platform': ['shared'],
  'server/data': ['server/platform', 'shared'],
  'server/domain': ['server/data', 'server/platform', 'shared'],
  'server/routes': ['server/domain', 'server/data', 'server/platform', 'shared'],
  'server/entry': ['server/routes', 'server/domain', 'server/data', 'server/platform', 'shared'],
  'server/vite.config.ts': [],

  'src/lib': ['shared', 'workers/entries'],
  'src/viz': ['src/lib', 'shared'],
  'src/state': ['src/lib', 'shared'],
  'src/components': ['src/viz', 'src/lib', 'src/state', 'shared'],
  'src/features': ['src/viz', 'src/components', 'src/state', 'src/lib', 'shared'],
  'src/shell': ['src/viz', 'src/components', 'src/state', 'src/lib', 'shared'],
  'src/app': ['src/shell', 'src/features', 'src/viz', 'src/components', 'src/state', 'src/lib', 'shared'],
  'src/main.tsx': ['src/app', 'src/lib'],
};

function roomOf(path: string): string | null {
  const rooms = Object.keys(allowed).filter((room) => path === room || path.startsWith(`${room}/`));
  return rooms.sort((a, b) => b.length - a.length)[0] ?? null;
}

const isOwn = (path: string): boolean => /^(src|workers|server|shared|samples|tests)\//.test(path);
const name = (found: Import): string => `${found.from}:${found.line} -> ${found.to}`;
const indebted = (found: Import): boolean =>
  debts.some((debt) => debt.from === found.from && debt.to === found.to);

describe('the house', () => {
  const imports = listImports();
  const own = imports.filter((found) => isOwn(found.to));

  it('has every source in a room', () => {
    expect(listSources().filter((path) => roomOf(path) === null)).toEqual([]);
  });

  it('imports in the allowed directions only', () => {
    const wrong = own.filter((found) => {
      const from = roomOf(found.from);
      const to = roomOf(found.to);
      if (from === null || to === null) return true;
      if (from === to) return false;
      return !allowed[from]!.some((room) => found.to === room || found.to.startsWith(`${room}/`));
    });
    expect(wrong.filter((found) => !indebted(found)).map(name)).toEqual([]);
  });

  it('keeps features apart', () => {
    const featureOf = (path: string): string | null => /^src\/features\/([^/]+)\//.exec(path)?.[1] ?? null;
    const wrong = own.filter((found) => {
      const from = featureOf(found.from);
      const to = featureOf(found.to);
      return from !== null && to !== null && from !== to;
    });
    expect(wrong.map(name)).toEqual([]);
  });

  it('names worker entries only in src/lib/workers', () => {
    const wrong = own.filter(
      (found) =>
        found.from.startsWith('src/') &&
        found.to.startsWith('workers/') &&
        !found.from.startsWith('src/lib/workers/'),
    );
    expect(wrong.map(name)).toEqual([]);
  });

  it('keeps React, Express and Drizzle out of the logic', () => {
    const heavy =
      /^(react|react-dom|react-router-dom|express|drizzle-orm|@electric-sql\/pglite|@tanstack\/.*)($|\/)/;
    const logic = /^(shared|workers|server\/domain)\//;
    const wrong = imports.filter((found) => logic.test(found.from) && heavy.test(found.to));
    expect(wrong.map(name)).toEqual([]);
    const dataKnowsExpress = imports.filter(
      (found) => found.from.startsWith('server/data/') && found.to.startsWith('express'),
    );
    expect(dataKnowsExpress.map(name)).toEqual([]);
  });

  it('takes zod from its one door', () => {
    const wrong = imports.filter((found) => found.to === 'zod' && found.from !== 'shared/util/zod.ts');
    expect(wrong.map(name)).toEqual([]);
  });

  it('keeps Node out of shared and out of what the page loads', () => {
    const wrong = imports.filter(
      (found) => found.to.startsWith('node:') && /^(shared|src)\//.test(found.from),
    );
    expect(wrong.map(name)).toEqual([]);
    const byFile = new Map<string, Import[]>();
    for (const found of imports) byFile.set(found.from, [...(byFile.get(found.from) ?? []), found]);
    const entries = listSources().filter((path) => path.endsWith('.worker.ts'));
    const reached = new Set<string>();
    const walk = (path: string): void => {
      if (reached.has(path)) return;
      reached.add(path);
      for (const found of byFile.get(path) ?? []) if (!found.typeOnly) walk(found.to);
    };
    for (const entry of entries) walk(entry);
    expect(entries.length).toBeGreaterThan(0);
    expect([...reached].filter((path) => path.startsWith('node:') || path === 'h5wasm/node')).toEqual([]);
  });

  it('has no cycles', () => {
    const next = new Map<string, string[]>();
    for (const found of own) {
      if (!found.typeOnly) next.set(found.from, [...(next.get(found.from) ?? []), found.to]);
    }
    const done = new Set<string>();
    const cycles: string[] = [];
    const visit = (path: string, trail: readonly string[]): void => {
      if (trail.includes(path)) {
        cycles.push([...trail.slice(trail.indexOf(path)), path].join(' -> '));
        return;
      }
      if (done.has(path)) return;
      for (const to of next.get(path) ?? []) visit(to, [...trail, path]);
      done.add(path);
    };
    for (const path of next.keys()) visit(path, []);
    expect(cycles).toEqual([]);
  });

  it('says in each top folder, in at most 20 lines, what may live there', () => {
    for (const folder of ['src', 'workers', 'server', 'shared', 'samples', 'tests']) {
      const lines = readFileSync(join(root, folder, 'README.md'), 'utf8')
        .trim()
        .split('\n');
      expect(lines.length, `${folder}/README.md`).toBeLessThanOrEqual(20);
      expect(lines.length).toBeGreaterThan(0);
    }
  });
});
