import type { UseQueryResult } from '@tanstack/react-query';
import type { ReactNode } from 'react';
import { Loaded } from './Loaded';
import { Page } from './Page';

export interface LoadedPageProps<T> {
  query: UseQueryResult<T>;
  what: string;
  /** Heading while there is nothing else to say: "Result". */
  title: string;
  /** Where to go when there is no such thing: a link. */
  otherwise?: ReactNode;
  children(data: T): ReactNode;
}

/** A page about one thing the server keeps; until it is here, a page that says so. */
export function LoadedPage<T>({ query, what, title, otherwise, children }: LoadedPageProps<T>): ReactNode {
  if (query.data !== undefined) return children(query.data);
  return (
    <Page title={title} heading={title}>
      <div className="px-5 py-3">
        <Loaded query={query} what={what} otherwise={otherwise}>
          {children}
        </Loaded>
      </div>
    </Page>
  );
}
