import { type ReactNode, useId } from 'react';

export interface LedgerSectionProps {
  title: string;
  note?: ReactNode;
  children: ReactNode;
}

export function LedgerSection({ title, note, children }: LedgerSectionProps) {
  const id = useId();
  return (
    <section aria-labelledby={id} className="min-w-0">
      <header className="mb-1 flex items-baseline justify-between gap-3 font-mono text-xs text-dim">
        <h3 id={id}>{title.toLowerCase()}</h3>
        <span>{note}</span>
      </header>
      {children}
    </section>
  );
}
