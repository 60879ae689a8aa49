import type { ReactNode } from 'react';
import { Link } from 'react-router-dom';

export interface LinkRowProps {
  to: string;
  name: ReactNode;
  /** Mono, at the right end of the first line: who, when, which study. */
  note?: ReactNode;
  /** Second line. */
  children?: ReactNode;
}

/** Shows where the pointer or the keyboard is, a little wider than the text; the hairline keeps the text's edges. */
const FILL =
  'before:absolute before:-inset-x-2 before:inset-y-0 before:-z-10 hover:before:bg-raised focus-within:before:bg-raised';

/** One line of a list that leads somewhere; the whole line is the link. */
export function LinkRow({ to, name, note, children }: LinkRowProps) {
  return (
    <li className={`relative isolate border-b border-line py-2 ${FILL}`}>
      <div className="flex items-baseline justify-between gap-x-4 max-sm:flex-wrap">
        <Link
          to={to}
          className="min-w-0 font-semibold wrap-anywhere outline-offset-0 after:absolute after:inset-0"
        >
          {name}
        </Link>
        {note === undefined ? null : (
          <span className="shrink-0 font-mono text-xs whitespace-nowrap text-dim">{note}</span>
        )}
      </div>
      {children === undefined ? null : <div className="mt-0.5 text-dim">{children}</div>}
    </li>
  );
}
