import type { Quantity, Verdict } from '../../../shared/contracts/output';
import { displayUnit, formatCount, formatQuantity, formatWithSigma } from '../../lib/format-number';
import { Table, Td, Th, Tr } from '../ui/Table';
import { pairVariants, type QuantityRow, VARIANT_WORDS } from './quantity-words';

export interface QuantityTableProps {
  quantities: Record<string, Quantity>;
  verdicts: Record<string, Verdict>;
}

/** Value and unit apart, so that the numbers of a column stand under each other. */
function splitQuantity(quantity: Quantity): { value: string; unit: string } {
  const { value, sigma, unit } = quantity;
  if (unit !== '1/s' && unit !== '/s')
    return { value: formatWithSigma(value, sigma), unit: displayUnit(unit) };
  const text = formatQuantity(quantity);
  const space = text.lastIndexOf(' ');
  return { value: text.slice(0, space), unit: text.slice(space + 1) };
}

function howWords({ method, n, sigma }: Quantity): string {
  const count = n > 0 ? `n ${formatCount(n)}` : '';
  const how = sigma === null && method === '' ? 'set' : method;
  return [how, count].filter((part) => part !== '').join(' · ');
}

export function QuantityTable({ quantities, verdicts }: QuantityTableProps) {
  const rows = pairVariants(quantities);
  if (rows.length === 0) return <p className="text-sm text-dim">Nothing yet.</p>;
  const isPaired = rows.some((row) => row.raw !== null || row.net !== null);
  const isJudged = Object.keys(verdicts).length > 0;
  return (
    <Table label="Quantities">
      <thead>
        <tr>
          <Th>quantity</Th>
          {isPaired ? (
            <>
              <Th numeric>{VARIANT_WORDS.raw}</Th>
              <Th numeric>{VARIANT_WORDS.net}</Th>
            </>
          ) : (
            <Th numeric>value</Th>
          )}
          <Th>unit</Th>
          {isJudged ? <Th numeric>significance</Th> : null}
          <Th>how</Th>
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => (
          <Row key={row.base} row={row} isPaired={isPaired} isJudged={isJudged} verdicts={verdicts} />
        ))}
      </tbody>
    </Table>
  );
}

interface RowProps {
  row: QuantityRow<Quantity>;
  isPaired: boolean;
  isJudged: boolean;
  verdicts: Record<string, Verdict>;
}

function Row({ row, isPaired, isJudged, verdicts }: RowProps) {
  const main = row.net ?? row.only ?? row.raw;
  if (main === null) return null;
  const { unit } = splitQuantity(main);
  const verdict = verdicts[`${row.base}.net`] ?? verdicts[row.base] ?? verdicts[`${row.base}.raw`];
  return (
    <Tr data-quantity={row.base}>
      <Td>{row.label}</Td>
      {isPaired && row.only === null ? (
        <>
          <ValueCell quantity={row.raw} mainUnit={unit} id={`${row.base}.raw`} dim />
          <ValueCell quantity={row.net} mainUnit={unit} id={`${row.base}.net`} />
        </>
      ) : (
        <ValueCell quantity={main} mainUnit={unit} id={row.base} span={isPaired ? 2 : 1} />
      )}
      <Td mono className="text-dim">
        {unit}
      </Td>
      {isJudged ? (
        <Td numeric>{verdict === undefined ? '' : `${verdict.significance.toFixed(1)} σ`}</Td>
      ) : null}
      <Td className="text-xs text-dim">{howWords(main)}</Td>
    </Tr>
  );
}

interface ValueCellProps {
  quantity: Quantity | null;
  mainUnit: string;
  id: string;
  span?: number;
  dim?: boolean;
}

function ValueCell({ quantity, mainUnit, id, span = 1, dim = false }: ValueCellProps) {
  if (quantity === null)
    return (
      <Td numeric colSpan={span} className="text-dim">
        none
      </Td>
    );
  const { value, unit } = splitQuantity(quantity);
  return (
    <Td
      numeric
      colSpan={span}
      className={dim ? 'text-dim' : ''}
      title={howWords(quantity)}
      data-value={quantity.value}
      data-id={id}
    >
      {/* Raw and net rates may take different prefixes; then each says its own. */}
      {unit === mainUnit ? value : `${value} ${unit}`}
    </Td>
  );
}
