import type { Check } from '../../../shared/contracts/output';
import { displayUnit, formatPlain } from '../../lib/format-number';
import { CheckMark } from '../ui/CheckMark';

const ORDER = { fail: 0, caution: 1, pass: 2 } as const;

function figureWords({ figure, unit }: Check): string {
  if (figure === null) return '';
  const name = displayUnit(unit);
  return name === '' ? formatPlain(figure, 4) : `${formatPlain(figure, 4)} ${name}`;
}

/** What failed comes first: it decides whether the rest is to be believed. */
export function CheckList({ checks }: { checks: readonly Check[] }) {
  if (checks.length === 0) return <p className="text-sm text-dim">No checks yet.</p>;
  const sorted = [...checks].sort((a, b) => ORDER[a.status] - ORDER[b.status]);
  return (
    <ul className="flex flex-col gap-1">
      {sorted.map((check) => (
        <li key={check.id} className="flex items-baseline gap-2 text-sm" data-check={check.id}>
          <CheckMark status={check.status} />
          <span className="min-w-0 flex-1">{check.sentence}</span>
          <span className="font-mono text-xs text-dim whitespace-nowrap">{figureWords(check)}</span>
        </li>
      ))}
    </ul>
  );
}
