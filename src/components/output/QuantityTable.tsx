import { useState } from 'react';
import type { Quantity, Verdict } from '../../../shared/contracts/output';
import { displayUnit, formatCount, formatQuantity, formatWithSigma } from '../../lib/format-number';
import { Button } from '../ui/Button';
import { Table, Td, Th, Tr } from '../ui/Table';
import { pairVariants, type QuantityRow, VARIANT_WORDS, type Variant } from './quantity-words';

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

/** Quantities that come raw and net stand in a table of their own, so that no number stands under a heading it is not. */
export function QuantityTable({ quantities, verdicts }: QuantityTableProps) {
  const [isWhole, setWhole] = useState(false);
  const rows = pairVariants(quantities);
  if (rows.length === 0) return <p className="text-sm text-dim">Nothing yet.</p>;
  // What is judged comes first: it is what the study was run for.
  const rank = (row: QuantityRow<Quantity>): number => (verdictOf(row, verdicts) === undefined ? 1 : 0);
  const paired = rows.filter((row) => row.only === null).sort((a, b) => rank(a) - rank(b));
  const single = rows.filter((row) => row.only !== null);
  const shared = { verdicts, isWhole };
  const tables = [
    <Rows
      key="paired"
      label="Quantities, raw and with accidentals subtracted"
      rows={paired}
      isPaired
      {...shared}
    />,
    <Rows key="single" label="Quantities" rows={single} isPaired={false} {...shared} />,
  ];
  return (
    <div className="flex flex-col gap-3 overflow-x-auto">
      {rows[0]?.only === null ? tables : tables.reverse()}
      <span>
        <Button size="sm" variant="quiet" aria-expanded={isWhole} onClick={() => setWhole(!isWhole)}>
          {isWhole ? 'Shorten how they were got' : 'Show how they were got in full'}
        </Button>
      </span>
    </div>
  );
}

interface RowsProps {
  label: string;
  rows: readonly QuantityRow<Quantity>[];
  isPaired: boolean;
  verdicts: Record<string, Verdict>;
  isWhole: boolean;
}

function Rows({ label, rows, isPaired, verdicts, isWhole }: RowsProps) {
  if (rows.length === 0) return null;
  const isJudged = rows.some((row) => verdictOf(row, verdicts) !== undefined);
  const variants = (['raw', 'net'] as const).filter((variant) => rows.some((row) => row[variant] !== null));
  return (
    <Table label={label}>
      <thead>
        <tr>
          <Th>quantity</Th>
          {isPaired ? (
            variants.map((variant) => (
              <Th key={variant} numeric>
                {VARIANT_WORDS[variant]}
              </Th>
            ))
          ) : (
            <Th numeric>value</Th>
          )}
          <Th>unit</Th>
          {isJudged ? <Th numeric>significance</Th> : null}
          <Th className="w-full min-w-16">how</Th>
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => (
          <Row
            key={row.base}
            row={row}
            variants={isPaired ? variants : null}
            isJudged={isJudged}
            verdict={verdictOf(row, verdicts)}
            isWhole={isWhole}
          />
        ))}
      </tbody>
    </Table>
  );
}

function verdictOf({ base }: QuantityRow<Quantity>, verdicts: Record<string, Verdict>): Verdict | undefined {
  return verdicts[`${base}.net`] ?? verdicts[base] ?? verdicts[`${base}.raw`];
}

interface RowProps {
  row: QuantityRow<Quantity>;
  /** Columns; null for quantities that know no raw and net. */
  variants: readonly Variant[] | null;
  isJudged: boolean;
  verdict: Verdict | undefined;
  isWhole: boolean;
}

function Row({ row, variants, isJudged, verdict, isWhole }: RowProps) {
  const main = row.net ?? row.only ?? row.raw;
  if (main === null) return null;
  const { unit } = splitQuantity(main);
  const how = howWords(main);
  return (
    <Tr data-quantity={row.base}>
      <Td className="whitespace-nowrap">{row.label}</Td>
      {variants !== null ? (
        variants.map((variant) => (
          <ValueCell
            key={variant}
            quantity={row[variant]}
            mainUnit={unit}
            id={`${row.base}.${variant}`}
            dim={variant === 'raw' && variants.length > 1}
          />
        ))
      ) : (
        <ValueCell quantity={main} mainUnit={unit} id={row.base} />
      )}
      <Td mono className="text-dim">
        {unit}
      </Td>
      {isJudged ? (
        <Td numeric>{verdict === undefined ? '' : `${verdict.significance.toFixed(1)} σ`}</Td>
      ) : null}
      <Td className={`text-xs text-dim ${isWhole ? '' : 'max-w-0 truncate'}`} title={how}>
        {how}
      </Td>
    </Tr>
  );
}

interface ValueCellProps {
  quantity: Quantity | null;
  mainUnit: string;
  id: string;
  dim?: boolean;
}

function ValueCell({ quantity, mainUnit, id, dim = false }: ValueCellProps) {
  if (quantity === null)
    return (
      <Td numeric className="text-dim">
        none
      </Td>
    );
  const { value, unit } = splitQuantity(quantity);
  return (
    <Td
      numeric
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
