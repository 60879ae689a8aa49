import type { ReactNode } from 'react';
import { explain } from '../../lib/errors/explain';
import { CheckMark } from '../ui/CheckMark';

export interface ProblemNoteProps {
  error: unknown;
  /** What to do: buttons or links. */
  children?: ReactNode;
}

/** The sentence first, the cause in a fold. */
export function ProblemNote({ error, children }: ProblemNoteProps) {
  const { sentence, place, cause } = explain(error);
  return (
    <div role="alert" className="max-w-prose py-2 text-sm">
      <p className="flex gap-2 text-text">
        <span className="pt-px">
          <CheckMark status="fail" />
        </span>
        <span>
          {sentence}
          {place === null ? null : <span className="block font-mono text-xs text-dim">at {place}</span>}
        </span>
      </p>
      <div className="mt-2 flex flex-wrap items-baseline gap-3 pl-5.5">
        {children}
        <details className="min-w-0 text-xs text-dim">
          <summary className="cursor-pointer hover:text-text">Cause</summary>
          <pre className="mt-1 max-h-60 overflow-auto font-mono whitespace-pre-wrap">{cause}</pre>
        </details>
      </div>
    </div>
  );
}
