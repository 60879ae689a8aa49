import type { ReactNode } from 'react';
import type { ProblemData } from '../../../../shared/errors/problem';
import { CheckMark } from '../../../components/ui/CheckMark';

export interface ProblemTextProps {
  problem: ProblemData;
  /** The way out: buttons. */
  children?: ReactNode;
}

/** What went wrong and where, as the engine said it. */
export function ProblemText({ problem, children }: ProblemTextProps) {
  return (
    <div role="alert" className="flex gap-2 text-sm">
      <span className="pt-0.5">
        <CheckMark status="fail" />
      </span>
      <div className="min-w-0">
        <p className="wrap-anywhere text-text">{problem.message}</p>
        {problem.place === null ? null : (
          <p className="mt-0.5 font-mono text-xs wrap-anywhere text-dim">at {problem.place}</p>
        )}
        {children === undefined ? null : <div className="mt-1.5 flex flex-wrap gap-2">{children}</div>}
      </div>
    </div>
  );
}
