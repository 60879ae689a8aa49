import { ProblemNote } from '../../../components/page/ProblemNote';
import { Button } from '../../../components/ui/Button';
import { useServerInfo } from '../../../lib/query/me';
import type { Credentials } from '../api/sign-in';

/** On a server only this machine reaches: one click into the demo group. */
export function DemoSignIn({ pending, onUse }: { pending: boolean; onUse(credentials: Credentials): void }) {
  const { data, error, refetch } = useServerInfo();
  if (error !== null) {
    return (
      <ProblemNote error={error}>
        <Button size="sm" onClick={() => void refetch()}>
          Try again
        </Button>
      </ProblemNote>
    );
  }
  const demo = data?.demo ?? null;
  if (demo === null) return null;
  return (
    <section aria-label="Demo sign-in" className="mt-8 border-t pt-4">
      <Button disabled={pending} onClick={() => onUse(demo)}>
        Use the demo sign-in
      </Button>
      <p className="mt-3 text-xs text-dim">
        The server runs for this machine only, so an invented group with samples is open. Or type it yourself:
      </p>
      <dl className="mt-1.5 grid grid-cols-[auto_1fr] gap-x-3 font-mono text-xs">
        <dt className="text-dim">e-mail</dt>
        <dd>{demo.email}</dd>
        <dt className="text-dim">password</dt>
        <dd>{demo.password}</dd>
      </dl>
    </section>
  );
}
