import { Mark } from '../ui/Mark';
import { RouteProblem } from './RouteProblem';

/** Nothing could be shown at all, not even the bar: the server did not answer, or the shell failed. */
export function RootProblem() {
  return (
    <main>
      <p className="flex h-11 items-center gap-2.5 border-b border-line px-5 font-mono text-sm font-semibold">
        <Mark size={22} />
        Gemel
      </p>
      <RouteProblem />
    </main>
  );
}
