import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { availableParallelism, tmpdir } from 'node:os';
import { join } from 'node:path';
import { parseArgs } from 'node:util';
import { measureBrowser } from './browser/main';
import { measureCommandLine } from './command-line';
import type { Finding } from './finding';
import { growthRows } from './growth';
import { type BenchSettings, measureRow } from './measure';
import { measurePairCache } from './pair-cache';
import { profileRow } from './profile';
import { printMarkdown, printTable, type ReportRow, reportKernel } from './report';
import { kernelRows } from './rows';
import { hasCompiler, requirePython } from './tools';

/**
 * `npm run bench [-- --quick] [--only NAME] [--browser | --all] [--json FILE] [--table]`, or `-- --profile NAME`.
 * NAME is the beginning of a row's name, or pair-cache or command-line.
 */
const { values } = parseArgs({
  options: {
    only: { type: 'string' },
    quick: { type: 'boolean', default: false },
    browser: { type: 'boolean', default: false },
    all: { type: 'boolean', default: false },
    json: { type: 'string' },
    table: { type: 'boolean', default: false },
    profile: { type: 'string' },
  },
});

function pythonOrLeave(): string {
  try {
    return requirePython();
  } catch (thrown) {
    console.error(thrown instanceof Error ? thrown.message : String(thrown));
    process.exit(2);
  }
}

const settings: BenchSettings = {
  python: pythonOrLeave(),
  cpp: hasCompiler(),
  folder: mkdtempSync(join(tmpdir(), 'gemel-bench-')),
  passes: values.quick ? 3 : 7,
  share: values.quick ? 0.25 : 1,
};
process.once('exit', () => rmSync(settings.folder, { recursive: true, force: true }));
process.once('SIGINT', () => process.exit(130));
process.once('SIGTERM', () => process.exit(143));
if (!settings.cpp) console.error('No g++ was found: the C++ limits are left out.');

interface Part {
  name: string;
  measure(): Promise<ReportRow[]>;
}

const rows: ReportRow[] = [];
const findings: Finding[] = [];
const parts: Part[] = [
  ...kernelRows.map((row) => ({
    name: row.name,
    async measure() {
      const finding = await measureRow(row, settings);
      findings.push(finding);
      return [reportKernel(finding)];
    },
  })),
  { name: 'growth', measure: async () => growthRows(findings) },
  { name: 'pair-cache', measure: async () => [await measurePairCache(settings)] },
  { name: 'command-line', measure: async () => [await measureCommandLine(settings)] },
];
const browser: Part = {
  name: 'browser',
  async measure() {
    await measureBrowser(settings, (found) => rows.push(...found));
    return [];
  },
};

async function run(): Promise<boolean> {
  const { only } = values;
  const listed = values.browser ? [browser] : values.all ? [...parts, browser] : parts;
  const chosen = listed.filter(({ name }) => only === undefined || name.startsWith(only));
  if (chosen.length === 0)
    throw new Error(`--only names no row: ${only}. There are ${listed.map(({ name }) => name).join(', ')}.`);
  const failures: string[] = [];
  for (const part of chosen) {
    console.error(part.name);
    try {
      rows.push(...(await part.measure()));
    } catch (thrown) {
      // One row that fails is told at the end, and the others are measured all the same.
      failures.push(`FAILED ${part.name}: ${thrown instanceof Error ? thrown.message : String(thrown)}`);
    }
  }
  if (values.table) {
    const command = `npm run bench -- ${process.argv.slice(2).join(' ')}`;
    const date = new Date().toISOString().slice(0, 10);
    console.log(`${date}, \`${command}\`, ${availableParallelism()} cores.\n\n${printMarkdown(rows)}`);
  } else {
    console.log(printTable(rows));
  }
  if (values.json !== undefined) writeFileSync(values.json, `${JSON.stringify({ rows }, null, 2)}\n`);
  for (const line of failures) console.error(line);
  return failures.length === 0;
}

if (values.profile === undefined) {
  process.exitCode = (await run()) ? 0 : 1;
} else {
  const row = kernelRows.find(({ name }) => name === values.profile);
  if (row === undefined)
    throw new Error(`--profile takes one of ${kernelRows.map(({ name }) => name).join(', ')}.`);
  console.log(await profileRow(row, settings));
}
