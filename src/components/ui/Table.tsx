import type { ComponentProps } from 'react';

export interface TableProps extends ComponentProps<'table'> {
  /** Names the table for screen readers. */
  label: string;
}

export function Table({ label, className = '', ...rest }: TableProps) {
  return <table {...rest} aria-label={label} className={`w-full border-collapse text-sm ${className}`} />;
}

export interface CellProps {
  /** Numbers and units: mono, right-aligned. */
  numeric?: boolean;
  /** Left-aligned mono, for units and names from files. */
  mono?: boolean;
}

function cellClass({ numeric, mono }: CellProps): string {
  if (numeric) return 'text-right font-mono tabular-nums whitespace-nowrap';
  return mono ? 'text-left font-mono' : 'text-left';
}

export function Th({ numeric, className = '', ...rest }: ComponentProps<'th'> & { numeric?: boolean }) {
  return (
    <th
      scope="col"
      {...rest}
      className={`border-b border-line px-2 py-1 font-mono text-xs font-normal text-dim first:pl-0 last:pr-0 ${numeric ? 'text-right' : 'text-left'} ${className}`}
    />
  );
}

export function Td({ numeric, mono, className = '', ...rest }: ComponentProps<'td'> & CellProps) {
  return (
    <td
      {...rest}
      className={`px-2 py-1 align-baseline first:pl-0 last:pr-0 ${cellClass({ numeric, mono })} ${className}`}
    />
  );
}

/** A row that shows where the pointer or the keyboard is. */
export function Tr({ className = '', ...rest }: ComponentProps<'tr'>) {
  return <tr {...rest} className={`hover:bg-raised focus-within:bg-raised ${className}`} />;
}
