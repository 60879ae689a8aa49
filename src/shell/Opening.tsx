import { Mark } from '../components/ui/Mark';

/** What stands on the page until its code is there. */
export function Opening() {
  return (
    <main role="status" className="flex h-dvh items-center justify-center gap-3 font-mono text-sm text-dim">
      <Mark size={28} />
      opening
    </main>
  );
}
