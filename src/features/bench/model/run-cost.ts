import { bytesOf } from './acquisition';
import { currentAssignment } from './bench-selectors';
import type { BenchState } from './bench-types';

/** What turning a dial costs that the kept counts cannot answer. */
export interface ReadingCost {
  bytes: number;
  /** From the rate of the last run that read; null before one has. */
  seconds: number | null;
}

export function readingCost(state: BenchState): ReadingCost {
  const held = new Set(Object.values(currentAssignment(state)));
  const bytes = state.shelf.filter(({ id }) => held.has(id)).reduce((sum, a) => sum + bytesOf(a), 0);
  const { bytesPerSecond } = state;
  return { bytes, seconds: bytesPerSecond === null ? null : bytes / bytesPerSecond };
}
