import { isRouteErrorResponse, Link, useRouteError } from 'react-router-dom';
import { Button } from '../ui/Button';
import { NotFound } from './NotFound';
import { Page } from './Page';
import { ProblemNote } from './ProblemNote';

/** One page failed; the bar and the other pages still work. */
export function RouteProblem() {
  const error = useRouteError();
  if (isRouteErrorResponse(error) && error.status === 404) return <NotFound />;
  return (
    <Page title="Failed" heading="This page failed">
      <div className="px-5 py-4">
        <ProblemNote error={error}>
          <Button size="sm" onClick={() => window.location.reload()}>
            Reload the page
          </Button>
          <Link to="/" className="text-dim underline underline-offset-4 hover:text-text">
            Go home
          </Link>
        </ProblemNote>
      </div>
    </Page>
  );
}
