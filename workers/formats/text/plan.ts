import type { TextLayout } from '../../../shared/contracts/layout';
import { Problem } from '../../../shared/errors/problem';
import { planScale, type TickScale } from './decimal';

/** A layout ready for reading lines. */
export interface TextPlan {
  /** ASCII code between columns; -1 for any run of blanks. */
  delimiter: number;
  /** ASCII code of the decimal mark. */
  mark: number;
  headerLines: number;
  timeColumn: number;
  channelColumn: number;
  scale: TickScale;
}

const delimiterCodes: Record<TextLayout['delimiter'], number> = {
  comma: 44,
  semicolon: 59,
  tab: 9,
  space: -1,
};

/** Checks the layout against itself. Throws `bad-layout`. */
export function planText(layout: TextLayout): TextPlan {
  if (layout.timeColumn === layout.channelColumn) {
    throw new Problem(
      'bad-layout',
      `Time and channel are both read from column ${layout.timeColumn + 1}; give each its own.`,
      'channelColumn',
    );
  }
  if (layout.delimiter === 'comma' && layout.decimal === 'comma') {
    throw new Problem(
      'bad-layout',
      'A comma cannot stand between columns and within numbers at once; choose another delimiter or a decimal point.',
      'decimal',
    );
  }
  return {
    delimiter: delimiterCodes[layout.delimiter],
    mark: layout.decimal === 'comma' ? 44 : 46,
    headerLines: layout.headerLines,
    timeColumn: layout.timeColumn,
    channelColumn: layout.channelColumn,
    scale: planScale(layout.timeUnitFs, layout.tickFs),
  };
}
