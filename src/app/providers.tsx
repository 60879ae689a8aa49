import { QueryClientProvider } from '@tanstack/react-query';
import { RouterProvider } from 'react-router-dom';
import { TooltipProvider } from '../components/ui/Tooltip';
import { onSignedOut, queryClient } from '../lib/query/query-client';
import { signInPath } from '../lib/query/sign-in-path';
import { createRouter } from './routes';

const router = createRouter();

// While the first page loads, its loader leads to the sign-in itself.
onSignedOut(() => {
  const { pathname, search } = router.state.location;
  if (!router.state.initialized || pathname === '/sign-in') return;
  void router.navigate(signInPath(pathname + search));
});

export function Providers() {
  return (
    <QueryClientProvider client={queryClient}>
      <TooltipProvider>
        <RouterProvider router={router} />
      </TooltipProvider>
    </QueryClientProvider>
  );
}
