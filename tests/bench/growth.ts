import type { Finding } from './finding';
import { describeGoal, judge, type ReportRow } from './report';
import { kernelRows } from './rows';

/** The largest growth of all kernels that count events, and of all that take frames. */
export function growthRows(findings: readonly Finding[]): ReportRow[] {
  return (['events', 'frames'] as const).flatMap((growsIn) => {
    const all = findings.filter(
      ({ name, growth }) =>
        growth !== null && kernelRows.find((row) => row.name === name)?.growsIn === growsIn,
    );
    if (all.length === 0) return [];
    const growth = Math.max(...all.map((finding) => finding.growth ?? 0));
    const mark = { goal: 1, least: 1.1, label: 'at most', smaller: true };
    // To one digit, as the goal is stated: a time of one size is known to a few per cent.
    const figure = Math.round(10 * growth) / 10;
    return [
      {
        kernel: `growth of time in ${growsIn}, the largest`,
        rate: growth,
        unit: '',
        ratioNumpy: null,
        ratioCpp: null,
        peakMB: null,
        growth,
        goal: describeGoal([mark]),
        met: judge([{ ...mark, figure }]),
      },
    ];
  });
}
