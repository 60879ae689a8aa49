import type { TextLayout } from '../../../shared/contracts/layout';
import { isTextLike } from '../text-like';

/** The first lines of a text, cut into cells in one way. */
export interface SampledText {
  delimiter: TextLayout['delimiter'];
  decimal: TextLayout['decimal'];
  headerLines: number;
  /** Cells of the line before the first tag (a remark counts when it has as many words); null when there is none. */
  header: string[] | null;
  /** Cells of the lines with tags. */
  rows: string[][];
}

const mostLines = 2000;
const mostHeader = 1000;
const delimiters = { tab: '\t', semicolon: ';', comma: ',', space: null } as const;
/** The surest sign between columns first: tabs are blanks too, and commas may be decimal. */
const ways: readonly Pick<SampledText, 'delimiter' | 'decimal'>[] = [
  { delimiter: 'tab', decimal: 'point' },
  { delimiter: 'tab', decimal: 'comma' },
  { delimiter: 'semicolon', decimal: 'point' },
  { delimiter: 'semicolon', decimal: 'comma' },
  { delimiter: 'comma', decimal: 'point' },
  { delimiter: 'space', decimal: 'point' },
  { delimiter: 'space', decimal: 'comma' },
];
const numberWith = {
  point: /^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i,
  comma: /^[+-]?\d+(,\d+)?(e[+-]?\d+)?$/i,
};

export function isNumber(cell: string, decimal: TextLayout['decimal']): boolean {
  return numberWith[decimal].test(cell);
}

/**
 * The way of cutting that gives most columns of numbers, two at least in nine lines of ten; null when none does.
 * `isWhole`: the file ends there.
 */
export function sampleText(head: Uint8Array, isWhole: boolean): SampledText | null {
  if (!isTextLike(head)) return null;
  const lines = completeLines(head, isWhole);
  let best: { cut: SampledText; numbers: number } | null = null;
  for (const way of ways) {
    const cut = cutLines(lines, way);
    if (cut === null) continue;
    const numbers = cut.rows[0]!.filter((_, column) =>
      cut.rows.every((row) => isNumber(row[column]!, way.decimal)),
    ).length;
    if (best === null || numbers > best.numbers) best = { cut, numbers };
  }
  return best?.cut ?? null;
}

function completeLines(head: Uint8Array, isWhole: boolean): string[] {
  const text = new TextDecoder().decode(head);
  const lines = text.split(/\r\n|\r|\n/, mostLines + 1);
  // The last line of the head may be cut.
  if (!isWhole || lines.length > mostLines || lines.at(-1) === '') lines.pop();
  return lines;
}

function cutLines(
  lines: readonly string[],
  way: Pick<SampledText, 'delimiter' | 'decimal'>,
): SampledText | null {
  const isTag = (cells: readonly string[]): boolean =>
    cells.filter((cell) => isNumber(cell, way.decimal)).length >= 2;
  const cells = lines.map((line) => (isRemark(line) ? null : cellsOf(line, way.delimiter)));
  const first = cells.findIndex((row) => row !== null && isTag(row));
  if (first < 0 || first > mostHeader) return null;
  const rows = cells.slice(first).filter((row) => row !== null);
  const columns = rows[0]!.length;
  const fitting = rows.filter((row) => row.length === columns && isTag(row));
  if (fitting.length < 0.9 * rows.length) return null;
  // Remarks are passed over anywhere, so only other lines make a header.
  const lastHeader = cells.slice(0, first).findLastIndex((row) => row !== null);
  return { ...way, headerLines: lastHeader + 1, header: headerOf(lines, cells, first, way), rows: fitting };
}

const isRemark = (line: string): boolean => /^\s*(#|$)/.test(line);

function headerOf(
  lines: readonly string[],
  cells: readonly (string[] | null)[],
  first: number,
  { delimiter }: Pick<SampledText, 'delimiter'>,
): string[] | null {
  const columns = cells[first]!.length;
  for (let at = first - 1; at >= 0; at -= 1) {
    const row = cells[at] ?? cellsOf(lines[at]!.replace(/^\s*#+\s*/, ''), delimiter);
    // "time [ps]" under runs of blanks is two words, but one name.
    const named = delimiter === 'space' && row.length !== columns ? joinUnits(row) : row;
    if (named.length === columns) return named;
  }
  return null;
}

function joinUnits(words: readonly string[]): string[] {
  const joined: string[] = [];
  for (const word of words) {
    if (/^[[(]/.test(word) && joined.length > 0) joined.push(`${joined.pop()} ${word}`);
    else joined.push(word);
  }
  return joined;
}

/** Quotes are taken off; a sign between columns inside quotes does not occur in numbers and is not looked for. */
function cellsOf(line: string, delimiter: TextLayout['delimiter']): string[] {
  const sign = delimiters[delimiter];
  const text = line.replace(/^\uFEFF/, '');
  const cells = sign === null ? text.trim().split(/[ \t]+/) : text.split(sign);
  return cells.map((cell) =>
    cell
      .trim()
      .replace(/^"(.*)"$/, '$1')
      .trim(),
  );
}
