import type { UseQueryResult } from '@tanstack/react-query';
import type { ReactNode } from 'react';
import { isMissing } from '../../lib/errors/request-problem';
import { Button } from '../ui/Button';
import { ProblemNote } from './ProblemNote';

export interface LoadedProps<T> {
  query: UseQueryResult<T>;
  /** What is being fetched, in words: "your sessions". */
  what: string;
  /** Where to go when there is no such thing: a link. */
  otherwise?: ReactNode;
  children(data: T): ReactNode;
}

/** What a query found; while it is on its way a quiet line, when it failed the sentence and a second try. */
export function Loaded<T>({ query, what, otherwise, children }: LoadedProps<T>): ReactNode {
  if (query.data !== undefined) return children(query.data);
  if (query.error !== null) {
    return (
      <ProblemNote error={query.error}>
        {isMissing(query.error) && otherwise !== undefined ? (
          otherwise
        ) : (
          <Button size="sm" onClick={() => void query.refetch()}>
            Try again
          </Button>
        )}
      </ProblemNote>
    );
  }
  return (
    <p role="status" className="py-2 font-mono text-xs text-dim">
      fetching {what} …
    </p>
  );
}
