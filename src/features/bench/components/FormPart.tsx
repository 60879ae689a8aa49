import type { ReactNode } from 'react';

export interface FormPartProps {
  title: string;
  note?: ReactNode;
  actions?: ReactNode;
  children: ReactNode;
}

/** A named group of fields in the reading dialog. */
export function FormPart({ title, note, actions, children }: FormPartProps) {
  return (
    <section aria-label={title} className="min-w-0">
      <header className="mb-3 flex min-h-8 items-center justify-between gap-3 border-b border-line font-mono text-xs text-dim">
        <h3 className="font-semibold">{title}</h3>
        <span className="flex items-center gap-3">
          {note}
          {actions}
        </span>
      </header>
      {children}
    </section>
  );
}
