import type { ResultSummary } from '../../../shared/contracts/http';
import { formatQuantity } from '../../lib/format-number';
import { quantityLabel, splitVariant, VARIANT_WORDS } from '../output/quantity-words';

/** Up to three numbers of a result on one line, each with its name, uncertainty and unit. */
export function Headline({ quantities }: { quantities: ResultSummary['headline'] }) {
  if (quantities.length === 0) return <span className="text-dim">no quantities</span>;
  return (
    <span className="flex flex-wrap gap-x-5 gap-y-0.5">
      {quantities.map((quantity) => (
        <span key={quantity.id} className="sm:whitespace-nowrap">
          <span className="text-xs text-dim">{nameOf(quantity.id)}</span>{' '}
          <span className="font-mono">{formatQuantity(quantity)}</span>
        </span>
      ))}
    </span>
  );
}

/** In a ledger raw and net are columns; on one line the name has to say it. */
function nameOf(id: string): string {
  const { variant } = splitVariant(id);
  return variant === null ? quantityLabel(id) : `${quantityLabel(id)}, ${VARIANT_WORDS[variant]}`;
}
