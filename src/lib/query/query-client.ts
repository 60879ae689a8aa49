import { QueryCache, QueryClient } from '@tanstack/react-query';
import { isSignedOut, RequestProblem } from '../errors/request-problem';

type Listener = () => void;
let signedOut: Listener = () => undefined;

/** Called when a query finds the session ended. The router says where to go; what the bench holds stays in memory. */
export function onSignedOut(listener: Listener): void {
  signedOut = listener;
}

/** A refusal will not change by asking again; a server that did not answer may. */
function shouldRetry(failures: number, error: Error): boolean {
  return failures < 2 && error instanceof RequestProblem && error.status === null;
}

/** The one client of the page. */
export const queryClient = new QueryClient({
  queryCache: new QueryCache({
    onError: (error) => {
      if (isSignedOut(error)) signedOut();
    },
  }),
  defaultOptions: {
    queries: { staleTime: 15_000, retry: shouldRetry },
    mutations: { retry: false },
  },
});
