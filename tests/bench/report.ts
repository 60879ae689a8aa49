import type { Finding } from './finding';
import { kernelRows, type Mark } from './rows';

export type Met = 'goal' | 'least' | 'no';

/** One line of the report and of the JSON file. */
export interface ReportRow {
  kernel: string;
  rate: number;
  unit: string;
  ratioNumpy: number | null;
  ratioCpp: number | null;
  peakMB: number | null;
  growth: number | null;
  goal: string;
  met: Met | null;
}

/** What a figure is held to; `smaller` where less is better. */
export interface Held extends Mark {
  figure: number;
  label: string;
  smaller?: boolean;
}

/** The worst of all marks; null when nothing could be compared. */
export function judge(marks: readonly Held[]): Met | null {
  if (marks.length === 0) return null;
  const reaches = ({ figure, smaller }: Held, aim: number): boolean =>
    smaller === true ? figure <= aim : figure >= aim;
  if (marks.every((held) => reaches(held, held.goal))) return 'goal';
  return marks.every((held) => reaches(held, held.least)) ? 'least' : 'no';
}

export function describeGoal(marks: readonly Pick<Held, 'goal' | 'least' | 'label'>[]): string {
  return marks.map(({ goal, least, label }) => `${goal} ${label} (${least})`).join(', ');
}

/** A row of the table out of what was measured of one kernel. */
export function reportKernel(finding: Finding): ReportRow {
  const { name, ...rest } = finding;
  const row = kernelRows.find((candidate) => candidate.name === name);
  const aims: (Mark & { label: string; figure: number | null })[] = [];
  if (row?.numpyMark) aims.push({ ...row.numpyMark, label: 'x NumPy', figure: finding.ratioNumpy });
  if (row?.cppMark) aims.push({ ...row.cppMark, label: 'x C++', figure: finding.ratioCpp });
  const held = aims.flatMap((aim) => (aim.figure === null ? [] : [{ ...aim, figure: aim.figure }]));
  return { ...rest, goal: describeGoal(aims), met: judge(held) };
}

const columns = ['kernel', 'rate', 'x NumPy', 'x C++', 'peak MB', 'growth', 'goal (least)', 'met'] as const;

function cells(row: ReportRow): string[] {
  const figure = (value: number | null, digits: number): string =>
    value === null ? '-' : value.toFixed(digits);
  return [
    row.kernel,
    `${row.rate.toPrecision(3)} ${row.unit}`,
    figure(row.ratioNumpy, 2),
    figure(row.ratioCpp, 2),
    figure(row.peakMB, 0),
    figure(row.growth, 2),
    row.goal,
    row.met ?? '-',
  ];
}

export function printTable(rows: readonly ReportRow[]): string {
  const lines = [[...columns], ...rows.map(cells)];
  const widths = columns.map((_, i) => Math.max(...lines.map((line) => line[i]!.length)));
  return lines.map((line) => line.map((cell, i) => cell.padEnd(widths[i]!)).join('  ')).join('\n');
}

/** For DEVELOPERS.md: what is held to a goal, and ratios where there are any, because rates belong to a machine. */
export function printMarkdown(rows: readonly ReportRow[]): string {
  const lines = rows
    .filter(({ goal }) => goal !== '')
    .map((row) => {
      const [kernel, rate, numpy, cpp, , growth, goal, met] = cells(row);
      const isRatio = row.ratioNumpy !== null || row.ratioCpp !== null;
      return [kernel, isRatio ? '' : rate, numpy, cpp, growth, goal, met];
    });
  const head = ['kernel', 'figure', 'x NumPy', 'x C++', 'growth', 'goal (least)', 'met'];
  return [head, head.map(() => '---'), ...lines].map((line) => `| ${line.join(' | ')} |`).join('\n');
}
