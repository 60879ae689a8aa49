import type { Outcome } from '../../shared/contracts/outcome';
import { Cancelled, toProblemData } from '../../shared/errors/problem';

/** Turns anything thrown into plain data, because class identity does not survive the border of a worker. */
export async function answer<T>(work: () => Promise<T>, place: string | null = null): Promise<Outcome<T>> {
  try {
    return { status: 'ok', value: await work() };
  } catch (thrown) {
    if (thrown instanceof Cancelled) return { status: 'cancelled' };
    return { status: 'error', problem: toProblemData(thrown, place) };
  }
}
