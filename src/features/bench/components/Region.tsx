import { type ReactNode, useId } from 'react';

export interface RegionProps {
  title: string;
  note?: ReactNode;
  /** Buttons at the right of the heading. */
  actions?: ReactNode;
  children: ReactNode;
}

/** One of the four regions of the bench: a heading that stays, a body that scrolls. */
export function Region({ title, note, actions, children }: RegionProps) {
  const id = useId();
  return (
    <section aria-labelledby={id} className="flex h-full min-h-0 flex-col">
      <header className="flex min-h-9 shrink-0 items-center justify-between gap-x-3 border-b border-line px-3.5 py-1 font-mono text-xs text-dim">
        <h2 id={id} className="font-semibold">
          {title}
        </h2>
        <span className="flex min-w-0 items-center gap-2">
          {note === undefined ? null : (
            <span className="min-w-0 truncate" title={typeof note === 'string' ? note : undefined}>
              {note}
            </span>
          )}
          {actions}
        </span>
      </header>
      <div
        className="min-h-0 flex-1 overflow-auto px-3.5 py-3 focus-visible:-outline-offset-2"
        // biome-ignore lint/a11y/noNoninteractiveTabindex: a region that scrolls must be reachable by keyboard
        tabIndex={0}
      >
        {children}
      </div>
    </section>
  );
}
