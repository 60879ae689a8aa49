import type { ReactNode } from 'react';

export interface PageProps {
  /** In the title of the window. */
  title: string;
  heading: ReactNode;
  /** Beside the heading: who, when, how many. */
  note?: ReactNode;
  actions?: ReactNode;
  children: ReactNode;
}

/** A page that is read: one small heading on a hairline, the contents below. */
export function Page({ title, heading, note, actions, children }: PageProps) {
  return (
    <>
      <title>{`${title} · Gemel`}</title>
      <header className="flex min-h-12 flex-wrap items-center gap-x-4 gap-y-1 border-b border-line px-5 py-2">
        <h1 className="text-lg font-semibold">{heading}</h1>
        {note === undefined ? null : <span className="font-mono text-xs text-dim">{note}</span>}
        <span className="flex-1" />
        {actions}
      </header>
      {children}
    </>
  );
}

export interface RegionProps {
  /** Lower case, as the regions of the bench are named. */
  name: string;
  note?: ReactNode;
  className?: string;
  children: ReactNode;
}

/** A part of a page, named in mono on a hairline. */
export function Region({ name, note, className = '', children }: RegionProps) {
  return (
    <section aria-label={name} className={`min-w-0 px-5 pt-3 pb-5 ${className}`}>
      <header className="flex items-baseline justify-between gap-3 border-b border-line pb-1.5 font-mono text-xs text-dim">
        <h2 className="font-semibold">{name}</h2>
        {note === undefined ? null : <span>{note}</span>}
      </header>
      {children}
    </section>
  );
}
