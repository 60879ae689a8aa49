import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { parseArgs } from 'node:util';
import { measureRow } from './measure';
import { printMarkdown, printTable, type ReportRow, reportKernel } from './report';
import { kernelRows } from './rows';
import { hasCompiler, requirePython } from './tools';

const { values } = parseArgs({
  options: {
    only: { type: 'string' },
    quick: { type: 'boolean', default: false },
    json: { type: 'string' },
    table: { type: 'boolean', default: false },
  },
});

const python = requirePython();
const cpp = hasCompiler();
if (!cpp) console.error('No g++ was found: the C++ limits are left out.');
const folder = mkdtempSync(join(tmpdir(), 'gemel-bench-'));
process.once('exit', () => rmSync(folder, { recursive: true, force: true }));
process.once('SIGINT', () => process.exit(130));

const settings = { python, cpp, folder, passes: values.quick ? 3 : 7, share: values.quick ? 0.25 : 1 };
const chosen = kernelRows.filter(({ name }) => values.only === undefined || name.startsWith(values.only));
const rows: ReportRow[] = [];
for (const row of chosen) {
  console.error(row.kernel);
  rows.push(reportKernel(await measureRow(row, settings)));
}
console.log(values.table ? printMarkdown(rows) : printTable(rows));
if (values.json !== undefined) writeFileSync(values.json, `${JSON.stringify({ rows }, null, 2)}\n`);
