import type { DialSpec, DialValues } from '../../../shared/contracts/dial';
import { displayUnit } from '../../lib/format-number';
import type { Theme } from '../../viz/types';
import type { Cell } from './arrange-maps';
import { splitVariant, VARIANT_WORDS } from './quantity-words';
import type { LinkedCursor } from './use-linked-cursor';

export interface CellContext {
  theme: Theme;
  note: string | null;
  specs: readonly DialSpec[];
  dials: DialValues;
  onTurn: ((values: DialValues) => void) | undefined;
  /** What moving the window costs, in words; null where it costs nothing. */
  turnCost: string | null;
  cursor: LinkedCursor | null;
  logScale: boolean;
  chosen: Record<string, number>;
}

export type CellProps = CellContext & { cell: Cell };

/** Heights in pixels of the plots, by what one reads from them. */
export const HEIGHTS = { wide: 300, line: 210, projection: 250 } as const;

export function noteOf({ id, map }: Cell, note: string | null): string {
  const { variant } = splitVariant(id);
  // The study's own caption may say it already.
  const isSaid = /subtracted|raw/i.test(map.label);
  const variantWords = variant === null || isSaid ? '' : VARIANT_WORDS[variant];
  const parts = [displayUnit(map.unit), variantWords, note ?? ''];
  return parts.filter((part) => part !== '').join(' · ');
}
