import { useShallow } from 'zustand/react/shallow';
import type { PairsKept } from '../../../../shared/contracts/engine';
import { currentStudy } from '../model/bench-selectors';
import { readingCost } from '../model/run-cost';
import { costWords } from '../model/run-words';
import { useBenchState } from './bench-context';

export interface TurnCost {
  /** Of the last whole run; null before one, or where a study counts no pairs of tags. */
  pairs: PairsKept | null;
  /** "41.2 MB, about 3 s": what reading again takes; null where there is nothing to read. */
  reading: string | null;
  /** What moving the window costs: null where it is answered while the hand moves. */
  window: string | null;
}

/** What turning a dial costs now, in words, said before it is turned. */
export function useTurnCost(): TurnCost {
  return useBenchState(
    useShallow((state) => {
      const pairs = state.pairs[state.study] ?? null;
      const cost = readingCost(state);
      const reading = cost.bytes === 0 ? null : costWords(cost);
      const needs = currentStudy(state)?.dials.find(({ id }) => id === 'window')?.needs;
      const isKept = pairs !== null && pairs.kept !== null;
      const isAnswered = needs === 'finish' || (needs === 'pairs' && isKept);
      return { pairs, reading, window: isAnswered || reading === null ? null : `moving it reads ${reading}` };
    }),
  );
}
