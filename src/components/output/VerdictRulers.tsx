import type { Quantity, Verdict } from '../../../shared/contracts/output';
import { displayUnit } from '../../lib/format-number';
import { BoundRuler } from '../../viz/BoundRuler';
import type { RulerEntry } from '../../viz/types';
import { LEVEL_WORDS, pairVariants, type QuantityRow } from './quantity-words';

export interface Measured {
  verdict: Verdict;
  quantity: Quantity;
}

/** What a value beyond the bound shows, by witness. */
const BOUND_NAMES: Record<string, string> = {
  reid: 'steering (Reid)',
  mancini: 'separable (Mancini)',
  duan: 'separable (Duan)',
};

function boundName(base: string): string {
  return BOUND_NAMES[base.split('.')[0] ?? ''] ?? 'bound';
}

function entryOf(label: RulerEntry['label'], measured: Measured | null): RulerEntry[] {
  if (measured === null) return [];
  const { quantity, verdict } = measured;
  return [
    { label, value: quantity.value, sigma: quantity.sigma, interval: verdict.interval, unit: quantity.unit },
  ];
}

export type JudgedRow = QuantityRow<Measured>;

/** Quantities that carry a verdict, raw and net together. */
export function judgedRows(
  verdicts: Record<string, Verdict>,
  quantities: Record<string, Quantity>,
): JudgedRow[] {
  const measured: Record<string, Measured> = {};
  for (const [id, verdict] of Object.entries(verdicts)) {
    const quantity = quantities[id];
    if (quantity !== undefined) measured[id] = { verdict, quantity };
  }
  return pairVariants(measured);
}

/** Each value on a ruler of its bound, with the claim in a sentence. */
export function VerdictRulers({ rows }: { rows: readonly JudgedRow[] }) {
  return (
    <div
      className="grid grid-cols-[repeat(auto-fit,minmax(min(100%,24rem),1fr))] gap-x-8 gap-y-6"
      data-section="verdicts"
    >
      {rows.map((row) => (
        <Ruler key={row.base} row={row} />
      ))}
    </div>
  );
}

function Ruler({ row }: { row: QuantityRow<Measured> }) {
  const raw = row.raw ?? row.only;
  const first = row.net ?? raw;
  if (first === null) return null;
  const { verdict, quantity } = first;
  // Both sentences in full stand in the ledger.
  const rawWords =
    row.net !== null && raw !== null
      ? `Raw: ${LEVEL_WORDS[raw.verdict.level]}, ${raw.verdict.significance.toFixed(1)} σ.`
      : '';
  const [claim, conditions] = splitSentence(verdict.sentence);
  return (
    <div data-verdict={row.base}>
      <BoundRuler
        title={row.label}
        entries={[...entryOf('accidentals subtracted', row.net), ...entryOf('raw', raw)]}
        bounds={[{ name: boundName(row.base), value: verdict.bound, unit: displayUnit(quantity.unit) }]}
        side={verdict.side}
        sentence={claim}
        assumption={[conditions, rawWords].filter((words) => words !== '').join(' ')}
      />
    </div>
  );
}

/** The claim, and the conditions it rests on, which a verdict states after it. */
export function splitSentence(text: string): [claim: string, conditions: string] {
  const end = text.search(/[.] (?=[A-Z])/);
  return end < 0 ? [text, ''] : [text.slice(0, end + 1), text.slice(end + 2)];
}
