import type { TextLayout } from '../../../shared/contracts/layout';
import { FS_PER_PS, FS_PER_S } from '../../../shared/units/ticks';
import { type ChosenColumns, chooseColumns } from './columns';
import type { SampledText } from './sample';

export interface TextProposal {
  layout: TextLayout;
  because: string;
  warnings: string[];
}

const unitsFs: Record<string, number> = {
  fs: 1,
  ps: FS_PER_PS,
  ns: 1e6,
  us: 1e9,
  µs: 1e9,
  μs: 1e9,
  ms: 1e12,
  s: FS_PER_S,
  sec: FS_PER_S,
  seconds: FS_PER_S,
};
const unitName = /(?:^|[\s_([./,-])(fs|ps|ns|us|µs|μs|ms|s|sec|seconds)[\s)\]]*$/i;

const delimiterWords: Record<TextLayout['delimiter'], string> = {
  comma: 'commas',
  semicolon: 'semicolons',
  tab: 'tabs',
  space: 'blanks',
};

/** A layout for the sampled lines; what they cannot tell is said in `warnings`. Null without a column that rises. */
export function proposeText(sample: SampledText): TextProposal | null {
  const columns = chooseColumns(sample);
  if (columns === null) return null;
  const unit = chooseUnit(sample, columns.time);
  const { delimiter, decimal, headerLines, rows } = sample;
  return {
    layout: {
      version: 1,
      format: 'text',
      kind: 'tags',
      delimiter,
      decimal,
      headerLines,
      timeColumn: columns.time,
      channelColumn: columns.channel,
      timeUnitFs: unit.unitFs,
      tickFs: unit.tickFs,
    },
    because: `Read as text with ${delimiterWords[delimiter]} between columns${decimal === 'comma' ? ' and a decimal comma' : ''}, ${nameColumn(sample, columns.time)} ${columns.rises} over the first ${rows.length} lines and ${nameColumn(sample, columns.channel)} holds ${columns.channels} whole numbers up to ${columns.lastChannel}${unit.because}.`,
    warnings: [...columns.warnings, ...unit.warnings, ...warnOfMark(sample, columns)],
  };
}

function nameColumn({ header }: SampledText, column: number): string {
  const name = header?.[column];
  return `column ${column + 1}${name ? ` ("${name.slice(0, 40)}")` : ''}`;
}

/** The unit that the header names, and the tick that the digits call for: times are whole ticks then. */
function chooseUnit(
  { rows, header, decimal }: SampledText,
  time: number,
): { unitFs: number; tickFs: number; because: string; warnings: string[] } {
  const name = header?.[time] ?? '';
  const found = unitName.exec(name)?.[1]?.toLowerCase();
  const unitFs = found === undefined ? undefined : unitsFs[found];
  const places = decimalPlaces(rows, time, decimal);
  const isWhole = places === 0;
  if (unitFs === undefined && isWhole) {
    return {
      unitFs: FS_PER_PS,
      tickFs: FS_PER_PS,
      because: '',
      warnings: [
        'The length of a tick cannot be known from such text: 1 ps is proposed, set the one of your time tagger.',
      ],
    };
  }
  const length = unitFs ?? FS_PER_S;
  const warnings =
    unitFs === undefined
      ? [
          'The heading names no unit: times with decimals are taken to be in seconds, set the unit of your file.',
        ]
      : [];
  const exact = places === null ? null : length / 10 ** places;
  // Below a femtosecond, or where digits are those of a rounded double, they do not show the tick.
  if (exact === null || exact < 1) {
    warnings.push(
      'The digits of the times do not show the length of a tick: times are rounded to 1 ps, set the tick of your time tagger.',
    );
  }
  return {
    unitFs: length,
    tickFs: exact === null || exact < 1 ? Math.min(length, FS_PER_PS) : exact,
    because: found === undefined ? '' : `; its heading names the unit ${found}`,
    warnings,
  };
}

/** Most decimal places of the column; null where exponents show that all digits of a double were written. */
function decimalPlaces(
  rows: readonly string[][],
  time: number,
  decimal: TextLayout['decimal'],
): number | null {
  let most = 0;
  for (const row of rows) {
    const [mantissa, exponent] = row[time]!.toLowerCase().split('e') as [string, string?];
    const fraction = mantissa.split(decimal === 'comma' ? ',' : '.')[1] ?? '';
    const kept =
      exponent === undefined ? fraction.length : fraction.replace(/0+$/, '').length - Number(exponent);
    if (exponent !== undefined && kept > 12) return null;
    most = Math.max(most, kept);
  }
  return most;
}

function warnOfMark({ delimiter, decimal, rows }: SampledText, { time }: ChosenColumns): string[] {
  if (delimiter === 'space' && decimal === 'comma') {
    return [
      `Commas are taken for decimal marks ("${rows[0]![time]!}"): where they stand between columns, choose commas.`,
    ];
  }
  return [];
}
