import { Link } from 'react-router-dom';
import { Page } from './Page';

export function NotFound() {
  return (
    <Page title="Not found" heading="There is no such page">
      <p className="max-w-prose px-5 py-4 text-dim">
        The address may be mistyped, or what it showed was deleted.{' '}
        <Link to="/" className="text-text underline underline-offset-4">
          Go home
        </Link>{' '}
        and start from there.
      </p>
    </Page>
  );
}
